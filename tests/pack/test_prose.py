from __future__ import annotations

import pytest

from calcbook.errors import PackError
from calcbook.pack.prose import last_level, read


def test_paragraph_with_emphasis() -> None:
    """Bold, italic, code and links keep their words and their kind."""
    (paragraph,) = read("a **b** *c* `d*e` [f](https://example.org)")
    assert paragraph == {
        "t": "paragraph",
        "c": [
            "a ", {"t": "strong", "c": ["b"]}, " ", {"t": "emph", "c": ["c"]}, " ",
            {"t": "code", "s": "d*e"}, " ",
            {"t": "url", "to": "https://example.org", "c": ["f"]},
        ],
    }  # fmt: skip


def test_heading_levels_are_never_skipped() -> None:
    """Headings start below the workbook's title and go down one level at a time."""
    nodes = read("#### Deep\n\n## Scope\n\n##### Deeper\n\n# Top")
    assert [n["level"] for n in nodes if isinstance(n, dict)] == [2, 2, 3, 2]
    assert last_level(nodes, 1) == 2
    assert last_level(read("only words"), 3) == 3


def test_title_is_not_printed_twice() -> None:
    """The notebook's own title is left out, other headings stay."""
    assert read("# Wind pressure", title="Wind pressure") == []
    assert len(read("# Scope", title="Wind pressure")) == 1


def test_lists_tables_quotes_and_listings() -> None:
    """Lists keep their start, tables their cells, quotes and listings their words."""
    kinds = [
        n["t"]
        for n in read("- a\n- b\n\n3. c\n\n> d\n\n```\ne *f*\n```\n\n---\n\n| g |\n|---|\n| h |")
        if isinstance(n, dict)
    ]
    assert kinds == ["bullets", "numbered", "quote", "listing", "line", "grid"]
    (numbered,) = read("3. c")
    assert isinstance(numbered, dict)
    assert numbered["start"] == 3


def test_bare_symbol_is_set() -> None:
    """A bare symbol between dollar signs is set as a symbol, an escaped dollar is a dollar."""
    (paragraph,) = read("see $K_{zt}$ for \\$5")
    assert isinstance(paragraph, dict)
    assert paragraph["c"][1]["t"] == "math"
    assert "".join(c for c in paragraph["c"] if isinstance(c, str)).endswith(" for $5")


@pytest.mark.parametrize(
    ("markdown", "told"),
    [
        ("<b>bold</b>", "HTML"),
        ("a <br> b", "HTML"),
        ("![a plan](plan.png)", "a picture"),
        ("$\\frac{a}{b}$", "TeX"),
        ("$$\na = b\n$$", "a formula in TeX"),
        ("$5 and a formula $", "TeX"),
    ],
)
def test_unknown_markup_is_refused(markdown: str, told: str) -> None:
    """What cannot be printed is refused by name, never dropped."""
    with pytest.raises(PackError, match=f"has {told}") as caught:
        read(markdown)
    assert caught.value.hint
