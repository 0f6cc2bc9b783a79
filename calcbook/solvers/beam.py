"""A beam on its supports under load cases and combinations, from the columns of a workbook."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from calcbook.errors import StaticsError
from calcbook.solvers import Outcome, Role, Solver
from calcbook.solvers.beam_found import FoundBeam, Names
from calcbook.statics.beam import Beam, Hinge, Support
from calcbook.statics.beam_loads import LineLoad, Load, MomentLoad, PointLoad
from calcbook.statics.patterns import solve_patterned

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping, Sequence

    from numpy.typing import NDArray

    Array = NDArray[np.float64]
    Given = Mapping[str, Any]

FREE = "free end"
BY_SPAN = "by span"
#: Load cases that may be on any of the spans, or on none.
LIVE = ("L", "L_0", "L_1", "Lr", "S")
NEAR = 1e-9


def run(given: Given) -> FoundBeam:
    """Solve a beam; raises StaticsError for one that cannot stand or is given wrongly."""
    labels, x, kinds = given["supports"], given["support place"], given["support kind"]
    _check_ends(labels, kinds)
    start = float(x[0])
    beam = Beam(
        _supports(given, start), float(x[-1]) - start, _stiffness(given, start),
        [Hinge(label, float(at) - start)
         for label, at in zip(given.get("hinges", ()), given.get("hinge place", ()), strict=True)],
    )  # fmt: skip
    cases = _cases(given)
    loads = [*_stretch_loads(given, start, cases), *_strip_loads(given, start, cases)]
    loads += [*_line_loads(given, start, cases), *_points(given, start, cases)]
    factors = np.vstack(
        [np.eye(len(cases)), *(_factors(given, kind, cases) for kind in ("strength", "service"))]
    )
    patterned = [c for c in LIVE if c in cases] if given["pattern"] == BY_SPAN else []
    solved = solve_patterned(
        beam, loads, factors, [cases.index(c) for c in patterned], cases=len(cases)
    )
    free = [kind == FREE for kind in kinds]
    held = [-1 if f else n - sum(free[:n]) for n, f in enumerate(free)]
    names = Names(
        tuple(cases),
        tuple(given.get("strength", ())),
        tuple(given.get("service", ())),
        tuple(_listed(given, cases)),
        tuple(held),
        start,
    )
    return FoundBeam(solved, names, patterned)


def _check_ends(labels: Sequence[str], kinds: Sequence[str]) -> None:
    for label, kind in list(zip(labels, kinds, strict=True))[1:-1]:
        if kind == FREE:
            raise StaticsError(
                f"the free end {label} lies between supports",
                hint="a free end is the first or the last row: leave this one out",
                named=(label,),
            )
    if len(labels) < 2:  # noqa: PLR2004  two ends
        raise StaticsError(
            "the beam has one end only", hint="list both ends, a free end as a row of its own"
        )


def _supports(given: Given, start: float) -> list[Support]:
    found = []
    columns = ("supports", "support place", "support kind", "vertical stiffness")
    rows = zip(*(given[c] for c in columns), given["turning stiffness"], strict=True)
    for label, x, kind, kv, kr in rows:
        if kind == FREE:
            continue
        springs = (float(kv) or None, float(kr) or None) if kind == "spring" else (None, None)
        found.append(Support(label, float(x) - start, kind, *springs))
    return found


def _stiffness(given: Given, start: float) -> list[tuple[float, float, float]]:
    columns = (given[c] for c in ("stretch from", "stretch to", "stretch stiffness"))
    return [
        (float(a) - start, float(b) - start, float(e)) for a, b, e in zip(*columns, strict=True)
    ]


def _cases(given: Given) -> list[str]:
    """Return every load case that a load is given for."""
    found: dict[str, None] = {}
    for role, told in SOLVER.roles.items():
        if told.by_case and told.rows not in ("strength", "service"):
            found |= dict.fromkeys(given.get(role, ()))
    return list(found)


def _listed(given: Given, cases: Sequence[str]) -> Iterator[str]:
    for case in given.get("cases", ()):
        if case not in cases:
            raise StaticsError(
                f"there is no load for the case {case}", hint=f"cases: {', '.join(cases)}"
            )
        yield case


def _factors(given: Given, kind: str, cases: Sequence[str]) -> Array:
    """Return factors (combinations, cases); a factor on a case nobody gives is refused."""
    names, by_case = given.get(kind, ()), given.get(f"{kind} factors", {})
    found = np.zeros((len(names), len(cases)))
    for case, column in by_case.items():
        if case in cases:
            found[:, cases.index(case)] = column
        elif np.any(column != 0):
            row = names[int(np.flatnonzero(column)[0])]
            raise StaticsError(
                f"combination {row} takes the load case {case}, and no load is given for it",
                hint=f"give the loads of {case}, or leave the combination out",
                named=(row, case),
            )
    return found


# --- loads ----------------------------------------------------------------------------------


def _stretch_loads(given: Given, start: float, cases: Sequence[str]) -> Iterator[Load]:
    """Yield the beam's own weight along its stretches."""
    for case, column in given.get("stretch load", {}).items():
        for n, w in enumerate(column):
            a, b = (float(given[c][n]) - start for c in ("stretch from", "stretch to"))
            if w:
                yield LineLoad(a, b, float(w), case=cases.index(case), label="of own weight")


def _strip_loads(given: Given, start: float, cases: Sequence[str]) -> Iterator[Load]:
    """Yield strips of floor: even, or rising and falling over a length at either end."""
    for case, column in given.get("strip load", {}).items():
        for n, label in enumerate(given["strips"]):
            a, b = (float(given[c][n]) - start for c in ("strip from", "strip to"))
            ramp, w = float(given["strip ramp"][n]), float(column[n])
            pieces = [(a, a + ramp, 0.0, w), (a + ramp, b - ramp, w, w), (b - ramp, b, w, 0.0)]
            if not ramp:
                pieces = [(a, b, w, w)]
            for x1, x2, w1, w2 in pieces:
                if w and not (ramp and abs(x2 - x1) <= NEAR * abs(b - a)):
                    yield LineLoad(x1, x2, w1, w2, cases.index(case), f"of strip {label}")


def _line_loads(given: Given, start: float, cases: Sequence[str]) -> Iterator[Load]:
    for case, share in given.get("line share", {}).items():
        for n, label in enumerate(given["lines"]):
            a, b = (float(given[c][n]) - start for c in ("line from", "line to"))
            w1, w2 = (float(given[c][n] * share[n]) for c in ("line load", "line load at the end"))
            if w1 or w2:
                yield LineLoad(a, b, w1, w2, cases.index(case), label)


def _points(given: Given, start: float, cases: Sequence[str]) -> Iterator[Load]:
    for case, share in given.get("point share", {}).items():
        for n, label in enumerate(given["points"]):
            at, force = float(given["point place"][n]) - start, float(given["point load"][n])
            if force * share[n]:
                yield PointLoad(at, force * float(share[n]), cases.index(case), label)
    for case, column in given.get("beam load", {}).items():
        for n, label in enumerate(given["beams"]):
            at = float(given["beam place"][n]) - start
            if column[n]:
                yield PointLoad(at, float(column[n]), cases.index(case), f"of beam {label}")
    for case, share in given.get("moment share", {}).items():
        for n, label in enumerate(given["moments"]):
            at, moment = float(given["moment place"][n]) - start, float(given["moment"][n])
            if moment * share[n]:
                yield MomentLoad(at, moment * float(share[n]), cases.index(case), label)


# --- what it takes and gives ----------------------------------------------------------------


def _roles() -> dict[str, Role]:
    length, force, line, load = "length", "force", "line load", True
    return {
        "supports": Role("supports and free ends", "text", "supports", main=True),
        "support place": Role("at", length, "supports"),
        "support kind": Role("held", "text", "supports"),
        "vertical stiffness": Role("springs, vertical", "stiffness", "supports"),
        "turning stiffness": Role("springs, turning", "rotational stiffness", "supports"),
        "hinges": Role("hinges", "text", "hinges", optional=True),
        "hinge place": Role("hinges at", length, "hinges", optional=True),
        "stretch from": Role("stretches from", length, "stretches"),
        "stretch to": Role("stretches to", length, "stretches"),
        "stretch stiffness": Role("EI", "bending stiffness", "stretches", main=True),
        "stretch load": Role("own weight", line, "stretches", load, optional=True),
        "strips": Role("strips", "text", "strips", optional=True, main=True),
        "strip from": Role("strips from", length, "strips", optional=True),
        "strip to": Role("strips to", length, "strips", optional=True),
        "strip ramp": Role("growing at both ends over", length, "strips", optional=True),
        "strip load": Role("load of strips", line, "strips", load, optional=True),
        "lines": Role("line loads", "text", "lines", optional=True, main=True),
        "line from": Role("line loads from", length, "lines", optional=True),
        "line to": Role("line loads to", length, "lines", optional=True),
        "line load": Role("line loads at the beginning", line, "lines", optional=True),
        "line load at the end": Role("line loads at the end", line, "lines", optional=True),
        "line share": Role("share of line loads", "number", "lines", load, optional=True),
        "points": Role("point loads", "text", "points", optional=True, main=True),
        "point place": Role("point loads at", length, "points", optional=True),
        "point load": Role("size of point loads", force, "points", optional=True),
        "point share": Role("share of point loads", "number", "points", load, optional=True),
        "beams": Role("beams that bear on it", "text", "beams", optional=True, main=True),
        "beam place": Role("these beams at", length, "beams", optional=True),
        "beam load": Role("what they bring", force, "beams", load, optional=True),
        "moments": Role("applied moments", "text", "moments", optional=True, main=True),
        "moment place": Role("applied moments at", length, "moments", optional=True),
        "moment": Role("size of applied moments", "moment", "moments", optional=True),
        "moment share": Role("share of moments", "number", "moments", load, optional=True),
        "pattern": Role("live load L, L_0, L_1, roof live load Lr and snow S", "text", main=True),
        "cases": Role("load cases listed", "text", "cases", optional=True),
        "strength": Role("strength combinations", "text", "strength", optional=True, main=True),
        "strength factors": Role("strength factors", "number", "strength", load, optional=True),
        "service": Role("service combinations", "text", "service", optional=True, main=True),
        "service factors": Role("service factors", "number", "service", load, optional=True),
    }


def _outcomes() -> dict[str, Outcome]:
    every, worst = "with the load on all spans", "on the spans that make it {}"
    found = {
        "reaction": Outcome(every, "force", "supports", by_case=True),
        "reaction moment": Outcome(every, "moment", "supports", by_case=True),
        "moment of the case": Outcome(every, "moment", by_case=True),
        "place of the moment of the case": Outcome(every, "length", by_case=True),
        "deflection in the span": Outcome(
            "of largest magnitude", "length", "supports", by_case=True
        ),
        "service deflection in the span": Outcome(
            "of largest magnitude over all service combinations", "length", "supports"
        ),
    }
    for which in ("largest", "smallest"):
        words = worst.format(which)
        found[f"{which} reaction"] = Outcome(words, "force", "supports", by_case=True)
        for q, kind in (("moment", "moment"), ("shear", "force")):
            found[f"{which} {q} by case"] = Outcome(words, kind, "cases")
            if q == "shear" and which == "smallest":
                continue  # in a span the largest is that of either sense
            name = f"{which} {q} in the span"
            found[name] = Outcome("over all strength combinations", kind, "supports")
            found[f"combination of the {name}"] = Outcome("by name", "text", "supports")
        for rows, q, kind in (
            ("strength", "moment", "moment"), ("strength", "shear", "force"),
            ("service", "deflection", "length"),
        ):  # fmt: skip
            found[f"{which} {q}"] = Outcome(words, kind, rows)
            found[f"place of the {which} {q}"] = Outcome("along the beam", "length", rows)
            found[f"spans loaded for the {which} {q}"] = Outcome("by name", "text", rows)
    return found


SOLVER = Solver(
    name="beam",
    method=(
        "Direct stiffness with a joint at every support, hinge and step; between joints shear, "
        "moment, slope and deflection are exact polynomials, and their largest values are found at "
        "the roots of the derivative. Live load, roof live load and snow act on any of the spans, "
        "the same ones together."
    ),
    roles=_roles(),
    outcomes=_outcomes(),
    run=run,
)
