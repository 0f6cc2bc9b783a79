"""How fast many stacks are accumulated: 1,000 stacks of 60 levels (run by hand).

    python tests/benchmarks/columns.py

Prints lines of context, and ``ratio columns-vs-numpy VALUE``: the column accumulation workbook
with stacks as cases, computing only, against the same loads hand-written in numpy.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np
import timing

from calcbook import cases
from calcbook.inputs import Given, GivenRow, Inputs
from calcbook.job import templates
from calcbook.run import Filling, Runner

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from calcbook.workbook import Workbook

    Array = NDArray[np.float64]

STACKS, LEVELS = 1_000, 60
AGREE = 1e-9
USES = ("office", "hospital ward", "storage light", "assembly fixed seats", "garage private")
LOADS = {"roof": 1.0, "office": 2.4, "hospital ward": 1.9, "storage light": 6.0,
         "assembly fixed seats": 2.9, "garage private": 1.9}  # fmt: skip


def main() -> None:
    """Measure and print the figure."""
    book = workbook()
    program = book.many()
    inputs: dict[str, Any] = {
        name: value[:, np.newaxis] if isinstance(value, np.ndarray) else value
        for name, value in book.readings.values.items()
    }
    random = np.random.default_rng(5)
    for name, low, high in (("A_t", 15.0, 60.0), ("D", 3e3, 9e3), ("A_ct", 0.1, 1.0)):
        inputs[name] = random.uniform(low, high, (LEVELS, STACKS))
    inputs["D_min"] = inputs["D"] / 2
    for name, low in (("W_c", 0.0), ("W_t", -9e4), ("E_c", 0.0), ("E_t", -9e4)):
        inputs[name] = random.uniform(low, low + 9e4, (LEVELS, STACKS))
    use = [str(u) for u in book.readings.values["use"]]  # type: ignore[union-attr]
    given = [inputs[n] for n in ("A_t", "D", "D_min", "A_ct", "W_c", "W_t", "E_c", "E_t")]
    found = cases.compute(program, inputs, book.readings.rows)
    for name, theirs in by_numpy(use, *given).items():
        np.testing.assert_allclose(found[name], theirs, rtol=AGREE, atol=1e-3, err_msg=name)
    times = timing.best({
        "ours": lambda: cases.compute(program, inputs, book.readings.rows),
        "numpy": lambda: by_numpy(use, *given),
    })  # fmt: skip
    timing.say(f"the workbook: {len(program.lines)} lines, columns among them")
    timing.ratio(
        "columns-vs-numpy", times["ours"], times["numpy"], 2,
        f"{STACKS:,} stacks of {LEVELS} levels with every load case at every level, reductions and "
        f"combinations, computing only, against numpy {np.__version__}",
    )  # fmt: skip


def workbook() -> Workbook:
    """Return the workbook filled with one stack of 60 levels of every use, areas typed."""
    book, _ = Runner(None).run(Filling(templates()["column-accumulation"]))
    keys = [f"L{n}" for n in range(LEVELS, 0, -1)]
    level = {"h_s": "3.5 m", "carried_by": "frame", "D": "5 kPa", "D_min": "3 kPa", "here": "yes",
             "L_a": "0 kPa", "A_t": "30 m2", "A_ct": "0.25 m2"}  # fmt: skip
    levels, frame = [], []
    for n, key in enumerate(keys):
        use = "roof" if n == 0 else USES[n % len(USES)]
        levels.append(GivenRow(key, {**level, "elevation": f"{3.5 * (LEVELS - n)} m", "use": use}))
        frame.append(GivenRow(key, {"W_c": "1 kN", "W_t": "-1 kN", "E_c": "1 kN", "E_t": "-1 kN"}))
    line = {"what": "typed", "line_of": "", "line_level": "L7", "l_k": "6 m", "w_t": "2 kN/m"}
    choices = {"area_from": "typed", "section": "area", "lateral": "typed",
               "parking": "as the code permits"}  # fmt: skip
    entries = {name: Given(text) for name, text in choices.items()}
    rows = {"levels": levels, "frame": frame, "lines": [GivenRow("beam", line)]}
    book.inputs = Inputs(entries, rows)
    book.evaluate()
    assert not book.results.problems, book.results.problems
    return book


def by_numpy(
    use: list[str], area: Array, dead: Array, least: Array, section: Array, *lateral: Array
) -> dict[str, Any]:
    """Return the loads of the stacks (levels, stacks) and the combinations, as one would by hand.

    Only what the results need: no intermediate value that the workbook prints is kept beyond that.
    """
    gamma, height, k = 23.6e3, 3.5, 4.0
    live = np.array([1e3 * LOADS[u] for u in use])[:, None]
    kind = {u: np.array([one == u for one in use])[:, None] for u in LOADS}
    by_area = kind["office"] | kind["hospital ward"]
    heavy, garage, assembly = kind["storage light"], kind["garage private"], kind[USES[3]]
    own = gamma * section * height
    line = np.array([12e3 if n == LEVELS - 7 else 0.0 for n in range(LEVELS)])[:, None]
    P_D = np.cumsum(dead * area + line + own, axis=0)  # noqa: N806  the workbook's names
    P_Dmin = np.cumsum(least * area + line + own, axis=0)  # noqa: N806
    floor = np.where(kind["roof"], 0.0, live * area)
    P_L0 = np.cumsum(floor, axis=0)  # noqa: N806
    n_f = np.cumsum(by_area, axis=0)
    influence = k * np.cumsum(by_area * area, axis=0)
    with np.errstate(divide="ignore"):
        r_f = np.maximum(np.where(n_f >= 2, 0.4, 0.5), 0.25 + 4.57 / np.sqrt(influence))
        r_f = np.where(influence >= 40, r_f, 1.0)
        cars = k * np.cumsum(garage * area, axis=0)
        r_g = np.where(cars >= 40, np.maximum(0.6, 0.25 + 4.57 / np.sqrt(cars)), 1.0)
    reduced = r_f * np.cumsum(by_area * floor, axis=0)
    others = (
        0.8 * np.cumsum(heavy * floor, axis=0)
        + r_g * np.cumsum(garage * floor, axis=0)
        + np.cumsum(assembly * floor, axis=0)
    )
    P_L, P_L1 = reduced + others, 0.5 * reduced + others  # noqa: N806
    roof = area[0]
    L_r = np.where(roof <= 20, 1e3, np.where(roof <= 60, 750.0, 600.0))  # noqa: N806
    P_Lr = np.cumsum(np.where(kind["roof"], L_r * area, 0.0), axis=0)  # noqa: N806
    W_c, W_t, E_c, E_t = (np.cumsum(one, axis=0) for one in lateral)  # noqa: N806
    at_base = [one[-1] for one in (P_D, P_Dmin, P_L, P_L1, P_Lr, W_c, W_t, E_c, E_t)]
    U = strength(at_base)  # noqa: N806
    return {"P_D": P_D, "P_Dmin": P_Dmin, "P_L0": P_L0, "P_L": P_L, "P_L1": P_L1, "P_Lr": P_Lr,
            "P_Wc": W_c, "P_Wt": W_t, "P_Ec": E_c, "P_Et": E_t, "U": U,
            "N_u": U.max(axis=0), "N_up": U.min(axis=0),
            "P_s": service(at_base)}  # fmt: skip


def strength(base: list[Array]) -> Array:
    """Return the strength combinations of NSCP 2015, in its order, both senses of W and E."""
    dead, least, live, live_1, roof, w_c, w_t, e_c, e_t = base
    return np.array([
        1.4 * dead, 1.2 * dead + 1.6 * live + 0.5 * roof, 1.2 * dead + 1.6 * roof + live_1,
        1.2 * dead + 1.6 * roof + 0.5 * w_c, 1.2 * dead + 1.6 * roof + 0.5 * w_t,
        1.2 * dead + w_c + live_1 + 0.5 * roof, 1.2 * dead + w_t + live_1 + 0.5 * roof,
        1.2 * dead + e_c + live_1, 1.2 * dead + e_t + live_1,
        0.9 * least + w_c, 0.9 * least + w_t, 0.9 * least + e_c, 0.9 * least + e_t,
    ])  # fmt: skip


def service(base: list[Array]) -> Array:
    """Return the service combinations of NSCP 2015, in its order, both senses of W and E."""
    dead, least, live, _, roof, w_c, w_t, e_c, e_t = base
    with_live = dead + 0.75 * live + 0.75 * roof
    return np.array([
        dead, dead + live, dead + roof, with_live,
        dead + 0.6 * w_c, dead + 0.6 * w_t, dead + e_c / 1.4, dead + e_t / 1.4,
        with_live + 0.45 * w_c, with_live + 0.45 * w_t,
        with_live + 0.75 * e_c / 1.4, with_live + 0.75 * e_t / 1.4,
        0.6 * least + 0.6 * w_c, 0.6 * least + 0.6 * w_t,
        0.6 * least + e_c / 1.4, 0.6 * least + e_t / 1.4,
    ])  # fmt: skip


if __name__ == "__main__":
    main()
