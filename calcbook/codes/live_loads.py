"""Live loads: by use, partitions, the factor in companion combinations, and what is reduced.

A floor's load belongs to one pool: reduced by area, heavy, garage, or not reduced. The clauses that
sort floors into pools are given by use, so that loads and areas of a pool add up level by level.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from calcbook.codes.clause import Cases, Clause, issued, template

if TYPE_CHECKING:
    from collections.abc import Mapping

    from calcbook.codes.uses import Use

HEAVY, HEAVY_US = "'4.8 kPa'", "'100 psf'"
COLUMNS = (
    "interior column",
    "exterior column",
    "edge column with cantilever slab",
    "corner column with cantilever slab",
)
MEMBERS = ("interior beam", "edge beam", "other member")


def clauses(
    edition: str,
    numbers: Mapping[str, str],
    different: Mapping[str, Mapping[str, Any]],
    uses: Mapping[str, Use],
    heavy_us: str = HEAVY,
) -> dict[str, Clause]:
    """Return the clauses of an edition by subject; see `issued`.

    ``heavy_us`` is the limit of heavy loads that it prints in US customary units. A metric code
    has one limit only, or its own 4.8 kPa would count as over 100 psf.
    """
    shared = (*_by_use(uses, heavy_us), *_pools(uses, heavy_us), _limit(heavy_us), *_REDUCTIONS)
    return issued(shared, edition, numbers, different)


def _by_use(uses: Mapping[str, Use], heavy_us: str) -> tuple[Clause, ...]:
    """Return the clauses that depend on the use of a floor, a choice named ``use``."""
    read = ", ".join(name for name, use in uses.items() if not use.from_memory)
    apart = _is(uses, "assembly", "garage")
    return (
        template(
            "live load",
            "live load",
            "Least uniform live load of the use",
            name="L_o",
            kind="pressure",
            cases=tuple((f"use == '{name}'", f"'{use.load}'") for name, use in uses.items()),
            cases_us=tuple((f"use == '{name}'", f"'{use.load_us}'") for name, use in uses.items()),
            note=f"Read in a published source: {read}. The others are from memory.",
            from_memory=any(use.from_memory for use in uses.values()),
        ),
        template(
            "live load factor",
            "live load factor",
            "Factor on L beside roof live load, wind or earthquake",
            name="f_1",
            kind="number",
            cases=_two(f"L_o > {HEAVY} or {apart}", f"L_o <= {HEAVY} and not ({apart})", "0.5"),
            cases_us=_two(
                f"L_o > {heavy_us} or {apart}", f"L_o <= {heavy_us} and not ({apart})", "0.5"
            ),
            note="1.0 for public assembly, garages and loads over 4.8 kPa (100 psf).",
        ),
    )


def _limit(heavy_us: str) -> Clause:
    return template(
        "heavy live load limit",
        "heavy live load",
        "Live load above which it counts as heavy",
        name="L_heavy",
        kind="pressure",
        formula=HEAVY,
        formula_us=heavy_us,
    )


def _pools(uses: Mapping[str, Use], heavy_us: str) -> tuple[Clause, ...]:
    """Return the clauses that give 1 for a floor of a pool and 0 for another."""
    garage, heavy = _is(uses, "garage"), _is(uses, "heavy")
    fixed = _is(uses, "garage", "assembly", "no")
    pools = []
    for subject, name, meaning, within, without in (
        (
            "reducible floor", "i_f", "1 where live load is reduced by area, 0 elsewhere",
            f"L_o <= {{limit}} and not ({fixed} or {heavy})",
            f"L_o > {{limit}} or {fixed} or {heavy}",
        ),
        (
            "heavy floor", "i_h", "1 where live load counts as heavy, 0 elsewhere",
            f"{heavy} or (L_o > {{limit}} and not ({fixed}))",
            f"not ({heavy}) and (L_o <= {{limit}} or {fixed})",
        ),
        (
            "garage floor", "i_g", "1 where live load is that of a garage, 0 elsewhere",
            garage, f"not ({garage})",
        ),
    ):  # fmt: skip
        pools.append(
            template(
                subject,
                subject,
                meaning,
                name=name,
                kind="number",
                cases=_two(within.format(limit=HEAVY), without.format(limit=HEAVY), "0.0"),
                cases_us=_two(within.format(limit=heavy_us), without.format(limit=heavy_us), "0.0"),
                note="Assembly, roofs and other loads in no pool are not reduced as floors.",
            )
        )
    return tuple(pools)


def _is(uses: Mapping[str, Use], *kinds: str) -> str:
    """Return the condition that ``use`` is one of some kinds."""
    found = [name for name, use in uses.items() if use.reducible in kinds]
    return " or ".join(f"use == '{name}'" for name in found)


def _two(within: str, without: str, otherwise: str) -> Cases:
    return ((within, "1.0"), (without, otherwise))


def members(factors: Mapping[str, str]) -> Cases:
    """Return the cases of a factor by member, a choice named ``member``."""
    return tuple((f"member == '{member}'", factor) for member, factor in factors.items())


_REDUCTIONS = (
    template("live load reduction", "live load reduction", "Reduction of floor live load"),
    template(
        "column live load element factor",
        "live load element factor",
        "Live load element factor of the column",
        name="K_LL",
        kind="number",
        cases=members(dict(zip(COLUMNS, ("4", "4", "3", "2"), strict=True))),
    ),
    template(
        "beam live load element factor",
        "live load element factor",
        "Live load element factor of the member",
        name="K_LL",
        kind="number",
        cases=members(dict(zip(MEMBERS, ("2", "2", "1"), strict=True))),
        note=(
            "Edge beams with a cantilever slab count as other members. The tributary area of a "
            "one-way slab is at most 1.5 times its span squared."
        ),
    ),
    template(
        "floor live load reduction",
        "live load reduction",
        "Reduction factor of floor live load",
        name="R_f",
        kind="number",
        cases=(
            (
                "K_LL*A_T >= '37.16 m2'",
                "max(where(n_f >= 2, 0.4, 0.5), 0.25 + '4.57 m'/sqrt(K_LL*A_T))",
            ),
            ("K_LL*A_T < '37.16 m2'", "1.0"),
        ),
        cases_us=(
            (
                "K_LL*A_T >= '400 ft2'",
                "max(where(n_f >= 2, 0.4, 0.5), 0.25 + '15 ft'/sqrt(K_LL*A_T))",
            ),
            ("K_LL*A_T < '400 ft2'", "1.0"),
        ),
        note=(
            "A_T is the sum over the reducible floors carried, n_f their number. Not less than 0.5 "
            "for one floor, 0.4 for two or more."
        ),
    ),
    template(
        "heavy live load reduction",
        "heavy live load",
        "Reduction factor of heavy live load",
        name="R_h",
        kind="number",
        formula="where(n_f >= 2, 0.8, 1.0)",
        note="n_f is the number of heavy floors carried.",
    ),
    template(
        "garage live load reduction",
        "garage live load",
        "Reduction factor of live load of garages",
        name="R_g",
        kind="number",
        cases=(
            ("parking == 'not reduced'", "1.0"),
            ("parking == 'as the code permits'", "where(n_f >= 2, 0.8, 1.0)"),
        ),
        note="Not reduced in common practice. n_f is the number of garage floors carried.",
    ),
)
