"""How fast a workbook of 40 lines is evaluated, for one case and for 100,000 (run by hand).

    python tests/benchmarks/recalculate.py

Prints lines of context, and ``ratio NAME VALUE`` for each figure: our time over theirs, best of
measurements that took turns in this one run.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import forty_lines
import numpy as np
import pint
import timing
import wind_lines

from calcbook import cases

if TYPE_CHECKING:
    from collections.abc import Iterable

    from calcbook.workbook import Workbook

CASES = 100_000
AGREE = 1e-9  # relative; the two sides round in another order


def main() -> None:
    """Measure and print every figure."""
    book = forty_lines.workbook()
    lines, entries = len(book.program.lines), len(book.program.inputs)
    timing.say(f"the workbook: {lines} lines, {entries} entries, no checks")
    one_case(book)
    many_cases(book)
    wind_cases()


def one_case(book: Workbook) -> None:
    """Compare one evaluation with hand-written Python, on floats and on pint quantities."""
    values: dict[str, Any] = dict(book.readings.values)
    floats = [values[name] for name in forty_lines.ENTRIES]
    registry: Any = pint.UnitRegistry()
    quantities = list(forty_lines.quantities(registry).values())
    on_quantities = forty_lines.on_quantities(registry)

    def ours() -> dict[str, Any]:
        return book.program.evaluate(values, {}, {}, {}).values

    found = ours()
    computed = [found[bound.name] for bound in book.program.lines]
    agree(computed, forty_lines.on_floats(*floats))
    agree(computed, [_magnitude(q) for q in on_quantities(*quantities)])
    times = timing.best({
        "ours": ours,
        "function": lambda: book.program.compute(values, {}),
        "floats": lambda: forty_lines.on_floats(*floats),
        "pint": lambda: on_quantities(*quantities),
    })  # fmt: skip
    timing.ratio("recalculate-vs-python", times["ours"], times["floats"], 3,
                 "40 lines evaluated, with what applies and every value by name, against one "
                 "function of Python floats that returns 40 numbers")  # fmt: skip
    timing.say(f"of our time the compiled function of the workbook takes "
               f"{timing.span(times['function'])}")  # fmt: skip
    timing.ratio(
        "recalculate-vs-pint",
        times["ours"],
        times["pint"],
        0.01,
        f"the same 40 lines, against pint {pint.__version__} quantities made beforehand",
    )


def many_cases(book: Workbook) -> None:
    """Compare 100,000 cases, every entry differing from case to case, with numpy."""
    inputs = spread(book.readings.values, forty_lines.ENTRIES)
    program = book.many()
    arrays = [inputs[name] for name in forty_lines.ENTRIES]
    found = cases.compute(program, inputs, {})
    agree([found[bound.name] for bound in program.lines], forty_lines.on_arrays(*arrays))
    times = timing.best({
        "ours": lambda: cases.compute(program, inputs, {}),
        "numpy": lambda: forty_lines.on_arrays(*arrays),
    })  # fmt: skip
    timing.ratio("cases-vs-numpy", times["ours"], times["numpy"], 1.5,
                 f"{CASES:,} cases of the 40 lines, all 27 entries differing, computing only, "
                 f"against numpy {np.__version__}")  # fmt: skip


def wind_cases() -> None:
    """Say how the code set's own wind clauses compare; only the figure above has a target."""
    book = wind_lines.workbook()
    inputs = spread(book.readings.values, wind_lines.DIFFERING)
    program = book.many()
    arrays = {name: inputs[name] for name in wind_lines.DIFFERING}
    found = cases.compute(program, inputs, {})
    theirs = wind_lines.on_arrays(**arrays)
    agree([found[name] for name in theirs], theirs.values())
    times = timing.best({
        "ours": lambda: cases.compute(program, inputs, {}),
        "numpy": lambda: wind_lines.on_arrays(**arrays),
    })  # fmt: skip
    timing.say(
        f"for information: {CASES:,} cases of velocity and wall pressures by NSCP 2015 "
        f"({len(program.lines)} lines with a table, {len(arrays)} entries differing): "
        f"ours {timing.span(times['ours'])}, numpy {timing.span(times['numpy'])}, "
        f"{times['ours'] / times['numpy']:.3g} to 1"
    )


def spread(values: Any, differing: Iterable[str]) -> dict[str, Any]:
    """Return the inputs with these entries spread by 5 % either way over the cases."""
    random = np.random.default_rng(2)
    factors = {name: random.uniform(0.95, 1.05, CASES) for name in differing}
    return {n: v * factors[n] if n in factors else v for n, v in values.items()}


def agree(ours: Iterable[Any], theirs: Iterable[Any]) -> None:
    """Stop unless both sides found the same numbers: then there is nothing to compare."""
    for number, (one, other) in enumerate(zip(ours, theirs, strict=True), 1):
        np.testing.assert_allclose(one, other, rtol=AGREE, err_msg=f"line {number}")


def _magnitude(value: Any) -> float:
    return float(value.to_base_units().magnitude) if isinstance(value, pint.Quantity) else value


if __name__ == "__main__":
    main()
