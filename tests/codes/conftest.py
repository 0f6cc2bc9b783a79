"""Evaluating clauses as a workbook does: formula text, checked, compiled, in coherent SI."""

from __future__ import annotations

import csv
from pathlib import Path
from typing import TYPE_CHECKING

import pytest

from calcbook.compile import namespace, python_source
from calcbook.dimensions import Type, check, check_printed
from calcbook.formula import parse
from calcbook.units import kind, read_quantity, unit

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

    from calcbook.codes import CodeSet

REFERENCES = Path(__file__).parents[1] / "references"

OPTIONS = {
    "exposure": ("B", "C", "D"),
    "hill": ("none", "ridge", "escarpment", "axisymmetric hill"),
    "enclosure": ("enclosed", "partially enclosed"),
    "member": (
        *("interior column", "exterior column", "edge column with cantilever slab"),
        *("corner column with cantilever slab", "interior beam", "edge beam", "other member"),
    ),
    "parking": ("not reduced", "as the code permits"),
}
KINDS = {
    "length": ("z", "z_g", "z_e", "h", "L", "B", "H", "H_min", "L_h", "L_e", "x"),
    "number": (
        *("alpha", "r_1", "K_1", "K_2", "K_3", "gamma", "mu"),
        *("K_z", "K_zt", "K_d", "K_e", "G", "C_p", "GC_pi"),
        *("K_LL", "n_f", "R_1", "R_2", "F"),
    ),
    "pressure": ("q", "q_i", "L_o", "D_o"),
    "speed": ("V",),
    "area": ("A", "A_T", "A_I"),
    "angle": ("theta",),
}
TABLES = {
    "leeward_wall": "leeward wall pressure coefficient",
    "windward_roof_suction": "windward roof suction coefficient",
    "windward_roof_second_negative": "windward roof second negative coefficient",
    "windward_roof_second_positive": "windward roof second positive coefficient",
    "leeward_roof": "leeward roof pressure coefficient",
    "roof_zone_1": "roof zone 1 pressure coefficient",
    "roof_zone_2": "roof zone 2 pressure coefficient",
    "roof_zone_3": "roof zone 3 pressure coefficient",
    "roof_zone_4": "roof zone 4 pressure coefficient",
    "roof_area": "roof area reduction",
}


def scope(code: CodeSet, system: str) -> dict[str, Type]:
    """Return the types of all symbols that clauses use."""
    options = {**OPTIONS, "use": tuple(code.uses())}
    types = {name: Type("text", None, None, options=o) for name, o in options.items()}
    for what, symbols in KINDS.items():
        types |= {name: Type("number", kind(what).dimension, None) for name in symbols}
    for name, subject in TABLES.items():
        types[name] = Type("table", None, None, table=code.table(subject, system))
    return types


class Statement:
    """A clause in one unit system, its formulas checked and compiled."""

    def __init__(self, code: CodeSet, subject: str, system: str) -> None:
        stated = code.clause(subject).stated(system)
        self.types = scope(code, system)
        self.takes = {symbol: unit(text) for symbol, text in stated.takes.items()}
        self.gives = unit(stated.gives)
        self.printed = bool(stated.takes or stated.gives)
        self.dimensions = set()
        self.space = namespace(array=False)
        self.branches = [
            (self._condition(condition), self._formula(formula))
            for condition, formula in stated.cases or (("", stated.formula),)
        ]

    def _condition(self, text: str) -> str:
        if not text:
            return "True"
        node = parse(text)
        assert check(node, self.types, text).form == "truth"
        return python_source(node, scope=self.types, array=False)

    def _formula(self, text: str) -> str:
        node = parse(text)
        if self.printed:
            found = check_printed(node, self.types, text, self.takes, self.gives)
            source = python_source(node, scope=self.types, array=False, takes=self.takes)
            source = f"({source})*{self.gives.factor!r}"
        else:
            found = check(node, self.types, text)
            source = python_source(node, scope=self.types, array=False)
        self.dimensions.add(found.dimension)
        return source

    def __call__(self, **given: float | str) -> float:
        """Return the value in coherent SI; exactly one of the cases must hold."""
        values = {f"v_{name}": value for name, value in given.items()}
        values |= {f"v_{n}": t.table for n, t in self.types.items() if t.table is not None}
        held = [f for condition, f in self.branches if self._run(condition, values)]
        assert len(held) == 1, f"{len(held)} cases hold"
        return self._run(held[0], values)

    def _run(self, source: str, values: Mapping[str, object]) -> float:
        return eval(source, {**self.space, **values})  # noqa: S307  source of a checked formula


@pytest.fixture(scope="session")
def state() -> Callable[..., Statement]:
    """Return clauses as functions of SI values."""
    known: dict[tuple[str, str, str], Statement] = {}

    def stated(code: CodeSet, subject: str, system: str = "SI") -> Statement:
        key = (code.name, subject, system)
        if key not in known:
            known[key] = Statement(code, subject, system)
        return known[key]

    return stated


@pytest.fixture(scope="session")
def si() -> Callable[[str], float]:
    """Return the coherent SI value of a quantity as typed."""
    return lambda text: read_quantity(text).si


@pytest.fixture(scope="session")
def published() -> Callable[[str], list[dict[str, str]]]:
    """Return the rows of a file of published values by the name of the file."""

    def rows(name: str) -> list[dict[str, str]]:
        with (REFERENCES / f"{name}.csv").open(encoding="utf-8", newline="") as file:
            return list(csv.DictReader(file))

    return rows


@pytest.fixture(scope="session")
def wind_tables() -> dict[str, str]:
    """Return the subject of each table by the name that clauses look it up under."""
    return TABLES
