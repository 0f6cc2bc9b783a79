"""Measuring two ways of doing one thing side by side, and printing the ratio."""

from __future__ import annotations

import gc
import sys
import time
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping


def best(
    calls: Mapping[str, Callable[[], object]], *, rounds: int = 9, least: float = 0.02
) -> dict[str, float]:
    """Return the best time of each call, in seconds.

    Parameters
    ----------
    calls
        What is measured, by name.
    rounds
        How often each is measured. They take turns, so that what else the machine does meets all
        of them, and the best time of each is the one that was disturbed least.
    least
        A measurement repeats its call until about this many seconds have passed.
    """
    times = dict.fromkeys(calls, float("inf"))
    repeats = {name: _repeats(call, least) for name, call in calls.items()}
    for _ in range(rounds):
        for name, call in calls.items():
            times[name] = min(times[name], _seconds(call, repeats[name]) / repeats[name])
    return times


def _repeats(call: Callable[[], object], least: float) -> int:
    call()  # what is only ever done once is not what is measured
    return max(1, round(least / max(_seconds(call, 1), 1e-7)))


def _seconds(call: Callable[[], object], repeats: int) -> float:
    gc.collect()
    gc.disable()
    try:
        start = time.perf_counter()
        for _ in range(repeats):
            call()
        return time.perf_counter() - start
    finally:
        gc.enable()


def say(text: str) -> None:
    """Print a line of context."""
    sys.stdout.write(f"# {text}\n")
    sys.stdout.flush()


def ratio(name: str, ours: float, theirs: float, target: float, measured: str) -> None:
    """Print what was measured, then the figure.

    Parameters
    ----------
    name
        The figure's name.
    ours, theirs
        Seconds, best of the same run.
    target
        The ratio to reach.
    measured
        What was done, in words.
    """
    value = ours / theirs
    verdict = "reached" if value <= target else "NOT reached"
    say(f"{measured}: ours {span(ours)}, theirs {span(theirs)}; "
        f"to reach {target:g} or less, {verdict}")  # fmt: skip
    sys.stdout.write(f"ratio {name} {value:.4g}\n")
    sys.stdout.flush()


def span(seconds: float) -> str:
    """Return a time in the unit that reads best."""
    for factor, unit in ((1.0, "s"), (1e3, "ms")):
        if seconds * factor >= 1:
            return f"{seconds * factor:.2f} {unit}"
    return f"{seconds * 1e6:.2f} us"
