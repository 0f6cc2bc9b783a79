"""What is said under a schedule about its columns."""

from __future__ import annotations

import json

from clinic import column, schedule

from calcbook.pack.schedules import legend


def test_words_brought_forward_need_no_symbol() -> None:
    """A carried column of words is headed by its meaning; one of numbers is explained."""
    source = column("from_where", "Source", "", "carried", ["table"], labels={})
    gamma = column("gamma", "Unit weight", "kN/m3", "carried", ["24"])
    told = json.dumps(
        legend(schedule("2.1", "materials", "", ["concrete"], columns=[gamma, source]))
    )
    assert "Unit weight" in told
    assert "Source" not in told
