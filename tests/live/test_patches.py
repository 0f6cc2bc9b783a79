"""What is sent to a browser: only what changed, and enough to build the page from nothing."""

from __future__ import annotations

import copy
from typing import TYPE_CHECKING, Any

from hypothesis import given
from hypothesis import strategies as st

from calcbook.live.patches import Page

if TYPE_CHECKING:
    from calcbook.live import Session

CELL = st.fixed_dictionaries({"text": st.sampled_from(["1", "2", "3"])})
GRID = st.fixed_dictionaries({
    "kind": st.just("grid"), "words": st.sampled_from(["Floors", "Levels"]),
    "cells": st.dictionaries(st.sampled_from("abc"), st.fixed_dictionaries({"x": CELL, "y": CELL})),
}).map(lambda row: row | {"keys": list(row["cells"])})  # fmt: skip
TEXT = st.fixed_dictionaries({"kind": st.just("text"), "body": st.sampled_from(["p", "q"])})
ROWS = st.dictionaries(st.sampled_from(["1.1", "1.2", "1.3", "g"]), TEXT | GRID, max_size=4)


def patched(page: dict[str, Any], patch: dict[str, Any]) -> dict[str, Any]:
    """Return a page with a patch applied, as the browser does it."""
    page = copy.deepcopy(page)
    assert page["serial"] == patch["base"]
    page["head"] |= patch.get("head", {})
    page["order"] = patch.get("order", page["order"])
    for name, row in patch.get("rows", {}).items():
        whole = "cells" in row or row["kind"] != "grid"
        page["rows"][name] = row if whole else {**row, "cells": page["rows"][name]["cells"]}
    for name, changed in patch.get("cells", {}).items():
        for key, cells in changed.items():
            page["rows"][name]["cells"].setdefault(key, {}).update(cells)
    page["serial"] = patch["serial"]
    return page


def shown(page: dict[str, Any]) -> Any:
    """Return what is drawn of a page: the rows in order, with the cells of their keys."""
    rows = []
    for name in page["order"]:
        row = dict(page["rows"][name])
        if row["kind"] == "grid":
            row["cells"] = {key: row["cells"][key] for key in row["keys"]}
        rows.append((name, row))
    return rows


@given(st.lists(ROWS, min_size=1, max_size=5))
def test_a_browser_that_gets_every_patch_shows_the_same(states: list[dict[str, Any]]) -> None:
    """Patches applied one after the other give the rows, keys and cells of the page itself."""
    page = Page()
    browser = copy.deepcopy(page.data)
    for rows in states:
        patch = page.update({"title": "T"}, copy.deepcopy(rows))
        if patch is not None:
            browser = patched(browser, copy.deepcopy(patch))
        assert shown(browser) == shown(page.data)


def test_nothing_is_sent_where_nothing_changed() -> None:
    """The same rows again make no patch and leave the serial number alone."""
    page = Page()
    rows = {"1.1": {"kind": "text", "body": "p"}}
    assert page.update({"title": "T"}, rows) is not None
    assert page.update({"title": "T"}, copy.deepcopy(rows)) is None
    assert page.data["serial"] == 1


def test_a_cell_is_a_unit_of_change(wind: Session) -> None:
    """A typed cell sends that cell, the row's own, the computed one and no cell of other rows."""
    view = wind.views["Floors"]
    before = copy.deepcopy(view.page.data)
    wind.enter_cell("floors", "Roof", "z", "7.5 m")
    page = Page()
    page.data = before
    patch = page.update(view.head, view.rows)
    assert patch is not None
    assert patch["cells"].keys() == {"floors"}
    assert {k: set(v) for k, v in patch["cells"]["floors"].items()} == {"Roof": {"z", "F"}}


def test_the_data_of_a_page_is_complete(wind: Session) -> None:
    """A browser that opens later gets the rows as they are then, from the same dictionary."""
    view = wind.views["Site"]
    kept = view.page.data
    wind.enter("V", "81 m/s")
    assert view.page.data is kept
    assert kept["rows"]["V"]["field"]["text"] == "81"
