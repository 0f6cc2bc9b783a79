"""Beams and loads drawn at random for the properties."""

from __future__ import annotations

from typing import TYPE_CHECKING

from hypothesis import strategies as st

from calcbook.statics.beam import Beam, Hinge, Support
from calcbook.statics.beam_loads import LineLoad, Load, MomentLoad, PointLoad

if TYPE_CHECKING:
    from collections.abc import Callable

SIZES = st.integers(-60, 60).map(lambda n: 500.0 * n)


@st.composite
def beams(draw: Callable[..., object], hinged: bool = True) -> Beam:
    """Draw a beam of one to five spans, overhangs, steps in EI, springs, hinges in inner spans."""
    tenths = st.integers(20, 80).map(lambda n: n / 10)
    spans = draw(st.lists(tenths, min_size=1, max_size=5))
    before, after = (draw(st.sampled_from([0.0, 0.0, 1.2])) for _ in range(2))
    places = [before]
    for span in spans:
        places.append(places[-1] + span)
    kinds = [draw(st.sampled_from(["pinned", "fixed", "spring"])) for _ in places]
    supports = [
        Support(f"S{i}", x, kind, *((3e6, 2e6) if kind == "spring" else ()))
        for i, (x, kind) in enumerate(zip(places, kinds, strict=True))
    ]
    length = places[-1] + after
    step = draw(st.sampled_from([0.3, 0.5, 0.77])) * length
    stiffness = [(0.0, step, draw(st.sampled_from([1e6, 8e6]))), (step, length, 3e6)]
    hinges = []
    if hinged and kinds[0] == "fixed" and draw(st.booleans()):
        hinges = [Hinge("H", places[0] + 0.4 * spans[0])]
    return Beam(supports, length, stiffness, hinges)


@st.composite
def loads(draw: Callable[..., object], beam: Beam, cases: int = 1) -> list[Load]:
    """Draw up to six loads, of any sign, on a grid of 37 places that holds no hinge."""
    place = st.integers(0, 37).map(lambda n: beam.length * n / 37)
    found: list[Load] = []
    for case in range(cases):
        for _ in range(draw(st.integers(1, 3))):
            kind = draw(st.sampled_from(["line", "point", "moment"]))
            x1, x2 = draw(place), draw(place)
            one, two = draw(SIZES), draw(SIZES)
            if kind == "line" and x1 != x2:
                found.append(LineLoad(min(x1, x2), max(x1, x2), one, two, case=case))
            elif kind == "moment" and all(abs(x1 - h.x) > 1e-6 for h in beam.hinges):
                found.append(MomentLoad(x1, one, case=case))
            else:
                found.append(PointLoad(x1, two, case=case))
    return found


def mirrored(load: Load, length: float) -> Load:
    """Return a load seen from behind the beam: a moment turns the other way."""
    if isinstance(load, LineLoad):
        return LineLoad(length - load.x2, length - load.x1, load.end, load.w1, case=load.case)
    if isinstance(load, PointLoad):
        return PointLoad(length - load.x, load.P, case=load.case)
    return MomentLoad(length - load.x, -load.M, case=load.case)
