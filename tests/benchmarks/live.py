"""From a keystroke to the painted change in JupyterLab (run by hand).

    python tests/benchmarks/live.py

A workbook of 40 lines, all in sight of their entries, against one bare ipywidgets label that the
kernel echoes; and a schedule of 60 rows and 10 columns. Each change is a key pressed in the page;
it ends with the frame after the change was drawn. Needs Chromium.
"""

from __future__ import annotations

import json
import statistics
import sys
import tempfile
from pathlib import Path
from typing import TYPE_CHECKING, Any

import timing
from forty_lines import AS_PRINTED, ENTRIES, LINES

sys.path.insert(0, str(Path(__file__).resolve().parents[1] / "live"))
import lab

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

CHANGES, BLOCK, TARGET_MS = 30, 5, 100.0
LABEL = """
import ipywidgets as widgets
from IPython.display import display
field, label = widgets.Text(), widgets.Label("nothing")
field.observe(lambda change: setattr(label, "value", change["new"]), "value")
display(widgets.VBox([field, label]))
"""
ROWS = """
from calcbook import open_workbook
book = open_workbook("rows", "Rows")
with book.section("Rows") as s:
    rows = [{"key": f"R{n}", **{f"a_{c}": f"{n + c}.5 m" for c in range(5)}} for n in range(60)]
    with s.schedule("rows", "Sixty rows of ten columns", rows=rows) as t:
        for c in range(5):
            t.entry(f"a_{c}", f"Length {c}", unit="length")
        for c in range(5):
            t.line(f"b_{c} = a_{c}*running(a_{(c + 1) % 5})", f"Area {c}", unit="area")
        t.total("b_0")
"""
# Change a field as typing and Enter do; the promise gives the milliseconds until it is painted.
CHANGE = """
([field, text, watched]) => new Promise((done) => {
  const input = document.querySelector(field), seen = document.querySelector(watched);
  let from = 0;
  const watch = new MutationObserver(() => requestAnimationFrame(() => setTimeout(() => {
    watch.disconnect();
    done(performance.now() - from);
  })));
  watch.observe(seen, { childList: true, characterData: true, subtree: true, attributes: true });
  input.focus();
  Object.getOwnPropertyDescriptor(HTMLInputElement.prototype, "value").set.call(input, text);
  input.dispatchEvent(new Event("input", { bubbles: true }));
  from = performance.now();
  for (const kind of ["keydown", "keypress", "keyup"])
    input.dispatchEvent(
      new KeyboardEvent(kind, { key: "Enter", code: "Enter", keyCode: 13, bubbles: true }));
  input.dispatchEvent(new Event("change", { bubbles: true }));
})
"""


def forty() -> str:
    """Return the source of the workbook of 40 lines, as a notebook declares it."""
    told = ["from calcbook import open_workbook", "book = open_workbook('forty', 'Forty lines')"]
    told += ["with book.section('Entries') as s:"]
    told += [f"    s.entry({n!r}, 'entry {n}', {t!r}, unit={u!r})" for n, (t, u) in ENTRIES.items()]
    told += ["with book.section('Lines') as s:"]
    for name, formula in LINES:
        if isinstance(formula, str):
            told.append(
                f"    s.line({f'{name} = {formula}'!r}, {name!r}, **{AS_PRINTED.get(name, {})!r})"
            )
        else:
            told.append(f"    s.line({name!r}, {name!r}, cases={formula!r})")
    return "\n".join(told)


def write(folder: Path, name: str, source: str) -> None:
    """Write a notebook of one cell."""
    cell = {"cell_type": "code", "id": "c0", "metadata": {}, "outputs": [],
            "execution_count": None, "source": source}  # fmt: skip
    kernel = {"display_name": "Python 3", "language": "python", "name": "python3"}
    (folder / f"{name}.ipynb").write_text(json.dumps({
        "cells": [cell], "metadata": {"kernelspec": kernel}, "nbformat": 4, "nbformat_minor": 5,
    }))  # fmt: skip


def changes(
    page: Any, places: tuple[str, str], texts: Callable[[int], str], first: int
) -> list[float]:
    """Make a block of changes one after the other; returns the milliseconds each took.

    ``places`` are the selectors of the field and of what is watched.
    """
    field, watched = places
    page.bring_to_front()
    found = []
    for number in range(first, first + BLOCK):
        found.append(float(page.evaluate(CHANGE, [field, texts(number), watched])))
        page.wait_for_timeout(150)  # an engineer looks before typing on
    return found


def told(name: str, times: Sequence[float]) -> None:
    """Print median and 95th percentile of one kind of change."""
    ordered = sorted(times)
    p95 = ordered[min(len(ordered) - 1, round(0.95 * (len(ordered) - 1)))]
    median = statistics.median(times)
    verdict = "reached" if median < TARGET_MS else "NOT reached"
    timing.say(f"{name}: {len(times)} changes, median {median:.0f} ms, p95 {p95:.0f} ms; "
               f"below {TARGET_MS:.0f} ms, {verdict}")  # fmt: skip


def main() -> None:
    """Measure, block by block in turns, and print the ratio."""
    with tempfile.TemporaryDirectory() as scratch, lab.chromium() as browser:
        folder = Path(scratch) / "notebooks"
        folder.mkdir()
        for name, source in (("label", LABEL), ("forty", forty()), ("rows", ROWS)):
            write(folder, name, source)
        with lab.running_lab(folder) as address:
            _measure(browser, address)


def _measure(browser: Any, address: str) -> None:
    shown = {"label": ".widget-label", "forty": "[data-id='K_h']", "rows": "input[data-key='R59']"}
    pages = {name: lab.open_notebook(browser, address, f"{name}.ipynb") for name in shown}
    for name, page in pages.items():
        page.bring_to_front()
        lab.run_all(page, shown[name])
    label = "div.widget-text input", "div.widget-label"
    forty_lines = "input[title='entry V']", "[data-id='q_h'] .cb-body"
    rows = "input[data-key='R10'][data-column='a_0']", "table tfoot"
    times: dict[str, list[float]] = {name: [] for name in shown}
    for first in range(0, CHANGES, BLOCK):
        for name, places, texts in (
            ("label", label, "text {}".format),
            ("forty", forty_lines, lambda n: f"{60 + n} m/s"),
            ("rows", rows, lambda n: f"{20 + n} m"),
        ):
            times[name] += changes(pages[name], places, texts, first)
    for name, words in (("label", "a bare label"), ("forty", "a workbook of 40 lines"),
                        ("rows", "a schedule of 60 rows and 10 columns")):  # fmt: skip
        told(words, times[name])
    medians = {name: statistics.median(found) / 1000 for name, found in times.items()}
    timing.ratio("live-vs-label", medians["forty"], medians["label"], 2,
                 "one entry changed, from the key to the painted line")  # fmt: skip
    timing.ratio("rows-vs-label", medians["rows"], medians["label"], 2,
                 "one cell of 60 rows changed, from the key to the painted total")  # fmt: skip


if __name__ == "__main__":
    main()
