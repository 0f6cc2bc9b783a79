"""Usual forms of trusses: they stand, they measure what was asked for, their webs work as named."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable
from itertools import pairwise

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from truss_samples import gable_of_13, howe_roof, random_loads

from calcbook.errors import StaticsError
from calcbook.statics.generators import WEBS, TrussShape, Web, cantilever, flat, gable, monopitch

MANY = settings(max_examples=60, deadline=None)
lengths = st.floats(1.0, 60.0)
depths = st.floats(0.2, 10.0)
panels = st.integers(1, 12)
posted = st.sampled_from([web for web in WEBS if web != "Warren"])
parts = st.sampled_from([0.0, 0.1, 0.5, 1.0])

Form = Callable[[Web], TrussShape]

forms: st.SearchStrategy[Form] = st.one_of(
    st.builds(lambda s, h, n, p: lambda web: gable(s, h, n, web, heel=h * p),
              lengths, depths, panels, parts),
    st.builds(lambda s, d, n: lambda web: flat(s, d, n, web), lengths, depths, panels),
    st.builds(lambda s, p, h, n: lambda web: monopitch(s, p * h, h, n, web),
              lengths, parts, depths, panels),
    st.builds(lambda s, h, p, n: lambda web: cantilever(s, h, p * h, n, web),
              lengths, depths, parts, panels),
)  # fmt: skip
shapes = st.one_of(
    st.builds(lambda form, web: form(web), forms, posted),
    st.builds(lambda s, d, n: flat(s, d, n, "Warren"), lengths, depths, panels),
)


def uniform(shape: TrussShape) -> np.ndarray:
    """Return a uniform load of 1 N/m on the top chord, down at its joints, one case."""
    x = shape.at(shape.top)[:, 0]
    share = np.zeros(len(x))
    share[:-1] += np.diff(x) / 2
    share[1:] += np.diff(x) / 2
    loads = np.zeros((1, len(shape.joints.labels), 2))
    for joint, load in zip(shape.top, share, strict=True):
        loads[0, list(shape.joints.labels).index(joint), 1] = -load
    return loads


@given(shapes)
@MANY
def test_every_form_is_determinate_and_stands(shape: TrussShape) -> None:
    """A form has as many members and reactions as equations, no crossing, and carries a load."""
    truss = shape.truss(1e8)
    assert truss.redundancy == 0
    assert not truss.crossings
    assert not truss.passed
    assert truss.solve(uniform(shape)).residual < 1e-9


@given(forms)
@MANY
def test_the_webs_work_as_named(form: Form) -> None:
    """Under a uniform load no Pratt diagonal is compressed and no Howe diagonal is pulled."""
    for web, sign in (("Pratt", 1.0), ("Howe", -1.0)):
        shape = form(web)  # type: ignore[arg-type]
        found = shape.truss(1e8).solve(uniform(shape))
        diagonal = np.array([role == "diagonal" for role in shape.roles])
        least = (sign * found.forces[0, diagonal]).min(initial=0.0)
        assert least >= -1e-9 * found.scale[0], web


@given(forms, st.integers(0, 100))
@MANY
def test_a_warren_with_posts_takes_turns(form: Form, seed: int) -> None:
    """Diagonals of a Warren truss with posts rise and fall by turns."""
    shape = form("Warren with posts")
    assert shape.truss().solve(random_loads(shape.truss(), seed)).residual < 1e-9
    rising = [bar[0].startswith("L") for bar in shape.bars if bar[2] == "diagonal"]
    assert all(one != two for one, two in pairwise(rising))


def test_the_gable_is_the_published_howe_roof() -> None:
    """A Howe gable of three panels a side has the joints and members of the published one."""
    ours, theirs = gable(18.0, 4.5, 3, "Howe").truss(), howe_roof(3.0, 4.5)
    assert joined(ours.xy, ours.ends) == joined(theirs.xy, theirs.ends)


def test_the_gable_of_two_panels_is_the_published_one() -> None:
    """A Howe gable of two panels a side has the joints and members of the gable of 13."""
    ours, theirs = gable(12.0, 4.0, 2, "Howe").truss(), gable_of_13(3.0, 2.0)
    assert joined(ours.xy, ours.ends) == joined(theirs.xy, theirs.ends)


def joined(xy: np.ndarray, ends: np.ndarray) -> set[frozenset[tuple[float, ...]]]:
    """Return the members as pairs of places."""
    return {frozenset(tuple(xy[n].round(9).tolist()) for n in pair) for pair in ends}


def test_a_pratt_with_parallel_chords() -> None:
    """Four panels of 3 m: labels, places, roles and supports are as described."""
    shape = flat(12.0, 2.0, 4)
    assert shape.bottom == ("L0", "L1", "L2", "L3", "L4")
    assert shape.top == ("U0", "U1", "U2", "U3", "U4")
    assert shape.at(("L3", "U1")).tolist() == [[9, 0], [3, 2]]
    assert Counter(shape.roles) == {"bottom chord": 4, "top chord": 4, "post": 5, "diagonal": 4}
    named = dict(zip(shape.labels, shape.roles, strict=True))
    assert named["L0-L1"] == "bottom chord"
    assert named["U3-U4"] == "top chord"
    assert named["L2-U2"] == "post"
    assert [label for label, role in named.items() if role == "diagonal"] == [
        "U0-L1", "U1-L2", "L2-U3", "L3-U4",
    ]  # fmt: skip
    assert [(held.joint, held.kind) for held in shape.supports] == [
        ("L0", "pinned"), ("L4", "roller"),
    ]  # fmt: skip


def test_a_gable_meets_at_its_heels() -> None:
    """Without a heel both chords end at the supports; with one they are posts apart."""
    sharp, raised = gable(12, 3, 2), gable(12, 3, 2, heel=0.5)
    assert sharp.top == ("L0", "U1", "U2", "U3", "L4")
    assert sharp.at(("U2",)).tolist() == [[6, 3]]
    assert raised.top[0] == "U0"
    assert raised.at(("U0", "U1")).tolist() == [[0, 0.5], [3, 1.75]]
    assert "L0-U0" in raised.labels


def test_a_warren_has_no_posts() -> None:
    """A Warren truss has its top joints over the middle of its panels, and no posts."""
    shape = flat(12, 2, 4, "Warren")
    assert shape.top == ("U1", "U2", "U3", "U4")
    assert shape.at(shape.top)[:, 0].tolist() == [1.5, 4.5, 7.5, 10.5]
    assert "post" not in shape.roles


def test_a_cantilever_carries_its_moment_to_the_wall() -> None:
    """A load at the tip is carried by a couple P L / d at the wall."""
    truss = cantilever(6.0, 2.0, 1.0, 3).truss()
    loads = truss.loads([(0, "L3", 0.0, -10.0)], 1)
    found = truss.solve(loads)
    assert found.reaction("U0") == pytest.approx([-30, 10])
    assert found.reaction("L0") == pytest.approx([30, 0])


def test_stiffness_by_role() -> None:
    """EA by role goes to the members of that role; a role without one is refused."""
    shape = gable(12, 3, 2)
    ea = {"top chord": 4.0, "bottom chord": 3.0, "post": 2.0, "diagonal": 1.0}
    truss = shape.truss(ea)  # type: ignore[arg-type]
    assert truss.ea.tolist() == [ea[role] for role in shape.roles]
    with pytest.raises(StaticsError, match="no EA for the role 'post'"):
        shape.truss({"top chord": 1.0, "bottom chord": 1.0, "diagonal": 1.0})


@pytest.mark.parametrize(
    ("call", "what"),
    [
        (lambda: gable(0, 3, 2), "The span of the truss is 0"),
        (lambda: gable(12, -1, 2), "The height of the truss is -1"),
        (lambda: gable(12, float("nan"), 2), "height of the truss is nan"),
        (lambda: gable(12, 3, 0), "The truss has 0 panels"),
        (lambda: gable(12, 3, 2.5), "2.5 panels"),
        (lambda: gable(12, 3, 2, heel=4), "The depth at the heel is 4"),
        (lambda: gable(12, 3, 2, heel=-0.1), "The depth at the heel is -0.1"),
        (lambda: gable(12, 3, 2, "Warren"), "The web 'Warren' does not fit"),
        (lambda: flat(12, 2, 4, "pratt"), "The web 'pratt' does not fit"),
        (lambda: flat(12, 0, 4), "The depth of the truss is 0"),
        (lambda: monopitch(9, 3, 2, 4), "The depth at the low end is 3"),
        (lambda: monopitch(9, float("nan"), 2, 4), "The depth at the low end is nan"),
        (lambda: cantilever(6, 2, 3, 4), "The depth at the tip is 3"),
        (lambda: cantilever(float("inf"), 2, 1, 4), "The length of the truss is inf"),
    ],
)
def test_forms_that_are_refused(call: object, what: str) -> None:
    """Sizes, panels and webs that make no truss are refused, saying which."""
    with pytest.raises(StaticsError, match=what):
        call()  # type: ignore[operator]
