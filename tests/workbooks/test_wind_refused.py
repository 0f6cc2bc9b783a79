"""What the wind workbook refuses, and the words it does it in."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import pytest
from sheets import levels_at

from calcbook.errors import CalcbookError

if TYPE_CHECKING:
    from collections.abc import Callable

    from sheets import Sheet

    Fill = Callable[..., Sheet]

WIND = "wind-pressure"


def raised(run: Fill, sets: dict[str, str], rows: Any = None) -> str:
    """Return the message a filling of the wind workbook is refused with."""
    with pytest.raises(CalcbookError) as caught:
        run(WIND, sets, rows)
    return str(caught.value)


@pytest.mark.parametrize(
    ("name", "text", "words"),
    [
        ("enclosure", "open", ["open buildings are not covered"]),
        ("enclosure", "partialy enclosed", ["did you mean 'partially enclosed'"]),
        ("exposure", "A", ["choose one of: B, C, D"]),
        ("n_1", "0.8 Hz", ["1 Hz to 20 Hz", "flexible", "not cover"]),
        ("theta", "61 deg", ["0 deg to 60 deg"]),
        ("theta", "-5 deg", ["0 deg to 60 deg"]),
        ("L_x", "0 m", ["1 m to 1000 m"]),
        ("L_x", "-18 m", ["1 m to 1000 m"]),
        ("L_y", "3 mm", ["1 m to 1000 m"]),
        ("L_y", "18600 m", ["1 m to 1000 m"]),
        ("h", "0 m", ["1 m to 150 m"]),
        ("h", "7200 m", ["1 m to 150 m"]),
        ("V", "0 m/s", ["10 m/s to 120 m/s"]),
        ("V", "250 m/s", ["10 m/s to 120 m/s"]),
        ("V", "70", ["70 m/s"]),
        ("V", "70 m", ["a speed"]),
        ("L_x", "18,6 m", ["18.6 m"]),
    ],
)
def test_refused_entries(name: str, text: str, words: list[str], run: Fill) -> None:
    """Open, flexible, too steep, zero, negative, absurd: the message names entry and remedy."""
    message = raised(run, {"roof": "gable", name: text})
    assert f"{WIND}: {name}: " in message
    for word in words:
        assert word in message


def test_frequency_and_pitch_at_their_limits_are_accepted(fill: Fill) -> None:
    """1 Hz is a rigid building, 60 degrees the end of the table."""
    sheet = fill(WIND, {"n_1": "1 Hz", "roof": "gable", "ridge": "Y", "theta": "60 deg"})
    assert sheet.column("roof_X", "C_X2")[0] == pytest.approx(0.6)


@pytest.mark.parametrize(
    ("elevations", "words"),
    [
        (("0 m", "3.6 m", "7.2 m"), ["out of order", "highest first"]),
        (("7.2 m", "3.6 m", "3.6 m"), ["out of order", "highest first"]),
        (("7200 m", "0 m"), ["-60 m to 400 m"]),
        (("7.2 s", "0 m"), ["a length"]),
    ],
)
def test_refused_levels(elevations: tuple[str, ...], words: list[str], run: Fill) -> None:
    """Levels out of order, absurd or of another kind are refused by name, not summed."""
    message = raised(run, {}, levels_at(*elevations))
    assert "levels" in message or "elevation" in message
    for word in words:
        assert word in message


@pytest.mark.parametrize(
    ("sets", "elevations"),
    [
        ({"h": "11 m", "h_e": "7.2 m"}, ("11 m", "0 m")),
        ({"h": "7.2 m"}, ("7.2 m", "3.6 m", "1.5 m")),
        ({"roof": "flat", "theta": "15 deg"}, ("7.2 m", "0 m")),
        ({"roof": "gable", "theta": "15 deg", "r_r": "0.5 m", "h": "7.45 m"}, ("7.2 m", "0 m")),
        ({"roof": "gable", "theta": "15 deg", "r_r": "1.688 m", "h": "7.2 m"}, ("7.2 m", "0 m")),
    ],
    ids=["levels above the eaves", "open below", "flat with a slope", "rise", "mean height"],
)
def test_figures_that_do_not_fit_together(
    sets: dict[str, str], elevations: tuple[str, ...], fill: Fill
) -> None:
    """Levels, eaves, slope, rise and mean height that contradict one another fail a check."""
    sheet = fill(WIND, {"h_e": "7.2 m", "r_r": "0 m", **sets}, levels_at(*elevations))
    assert False in sheet.checks().values()
