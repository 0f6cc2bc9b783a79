"""Which figures there are, and what is refused."""

from __future__ import annotations

import subprocess
import sys
from typing import TYPE_CHECKING

import pytest
from samples import CLINIC, LADDER, figure

from calcbook import figures
from calcbook.errors import DeclarationError

if TYPE_CHECKING:
    from collections.abc import Callable


def test_names_are_listed_sorted() -> None:
    """The figures of the trade are there, in order."""
    found = figures.names()
    assert list(found) == sorted(found)
    assert {"build-up-section", "grid-plan", "level-ladder", "wind-elevation"} <= set(found)


def test_roles_tell_what_to_give() -> None:
    """A figure tells the roles it needs and those it may be given."""
    assert figures.roles("level-ladder") == (
        ("levels", "elevation"),
        ("storey", "use", "area"),
    )


@pytest.mark.parametrize("work", [figures.draw, figures.describe])
def test_unknown_figure_has_a_near_match(work: Callable[..., object]) -> None:
    """A misspelt figure is refused with the name that was meant."""
    with pytest.raises(DeclarationError, match="no figure 'level-lader'") as caught:
        work(CLINIC, figure("level-lader", levels="levels"))
    assert caught.value.hint == "did you mean 'level-ladder'?"


def test_figure_unlike_any_lists_them_all() -> None:
    """Where nothing is near, the refusal lists what there is."""
    with pytest.raises(DeclarationError) as caught:
        figures.roles("moment-diagram")
    assert "wind-elevation" in caught.value.hint


def test_unknown_role_has_a_near_match() -> None:
    """A misspelt role would silently leave something out: it is refused."""
    with pytest.raises(DeclarationError, match="no role 'elevaton'") as caught:
        figures.draw(CLINIC, figure("level-ladder", levels="levels", elevaton="elevation"))
    assert caught.value.hint == "did you mean 'elevation'?"


def test_needed_role_is_asked_for() -> None:
    """A role that must be given is named, with how to give it."""
    with pytest.raises(DeclarationError, match="'elevation'") as caught:
        figures.draw(CLINIC, figure("level-ladder", levels="levels"))
    assert "elevation=..." in caught.value.hint


def test_unknown_form_is_refused() -> None:
    """A form that is neither svg nor png is refused with what to use."""
    with pytest.raises(DeclarationError, match="'pdf'") as caught:
        figures.draw(CLINIC, LADDER, "pdf")
    assert caught.value.hint == "use 'svg' or 'png'"


def test_drawing_library_is_not_imported_before_drawing() -> None:
    """Importing the figures leaves matplotlib alone, so that the package starts fast."""
    code = "import sys, calcbook.figures; sys.exit('matplotlib' in sys.modules)"
    assert subprocess.run([sys.executable, "-c", code], check=False).returncode == 0
