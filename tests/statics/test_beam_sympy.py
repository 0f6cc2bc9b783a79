"""Random beams of several spans against sympy's Beam.

sympy takes loads upward positive and moments clockwise positive, and finds hogging moments and
upward deflections positive: its bending moment and deflection are ours with the other sign.
"""

from __future__ import annotations

import random
from fractions import Fraction
from typing import Any

import numpy as np
import pytest
from sympy import Rational, SingularityFunction
from sympy.physics.continuum_mechanics.beam import Beam as SympyBeam

from calcbook.statics.beam import Beam, Support
from calcbook.statics.beam_loads import LineLoad, Load, MomentLoad, PointLoad

EXACT = 1e-9
EI = 8


def random_beam(seed: int) -> tuple[list[Support], int, list[Load]]:
    """Return supports, length and loads, all whole numbers: 2 to 4 spans, overhangs included."""
    draw = random.Random(seed)  # noqa: S311  the same beams every time are what is wanted
    places = [draw.choice([0, 0, 2])]
    for _ in range(draw.choice([1, 2, 2, 3])):
        places.append(places[-1] + draw.randint(2, 7))
    length = places[-1] + draw.choice([0, 0, 3])
    kinds = ["pinned"] * len(places)
    if places[0] == 0 and draw.random() < 0.4:
        kinds[0] = "fixed"
    if places[-1] == length and draw.random() < 0.4:
        kinds[-1] = "fixed"
    supports = [Support(f"S{i}", x, k) for i, (x, k) in enumerate(zip(places, kinds, strict=True))]
    loads: list[Load] = [PointLoad(draw.randint(0, length), draw.randint(1, 20))]
    for _ in range(draw.randint(1, 2)):
        a, b = sorted(draw.sample(range(length + 1), 2))
        loads.append(LineLoad(a, b, draw.randint(-3, 9), draw.randint(0, 9)))
    loads.append(MomentLoad(draw.randint(1, length - 1), draw.randint(-9, 9)))
    return supports, length, loads


def solved_by_sympy(
    supports: list[Support], length: int, loads: list[Load]
) -> tuple[list[float], list[float], Any]:
    """Return reactions up, clockwise moments of the supports, and the solved beam."""
    other = SympyBeam(length, EI, 1)
    forces, moments = [], []
    for support in supports:
        found = other.apply_support(int(support.x), "fixed" if support.kind == "fixed" else "pin")
        force, moment = found if isinstance(found, tuple) else (found, None)
        forces.append(force)
        moments.append(moment)
    for load in loads:
        if isinstance(load, PointLoad):
            other.apply_load(-load.P, load.x, -1)
        elif isinstance(load, MomentLoad):
            other.apply_load(load.M, load.x, -2)
        else:
            rise = Rational(Fraction(int(load.end - load.w1), int(load.x2 - load.x1)))
            other.apply_load(-load.w1, load.x1, 0, end=load.x2)
            other.apply_load(-rise, load.x1, 1, end=load.x2)
    other.solve_for_reaction_loads(*forces, *(m for m in moments if m is not None))
    found = other.reaction_loads
    return (
        [float(found[f]) for f in forces],
        [0.0 if m is None else float(found[m]) for m in moments],
        other,
    )


def values(expression: Any, x: np.ndarray) -> np.ndarray:
    """Return the values of a sum of singularity functions, the right side of jumps."""
    total = np.zeros_like(x)
    for term, factor in expression.expand().as_coefficients_dict().items():
        if isinstance(term, SingularityFunction):
            _, a, n = term.args
            past = x - float(a)
            if n >= 0:
                total += float(factor) * np.where(past >= 0, past, 0.0) ** int(n) * (past >= 0)
        else:
            total += float(factor) * np.array([float(term.subs("x", v)) for v in x])
    return total


@pytest.mark.parametrize("seed", range(50))
def test_beams_agree_with_sympy(seed: int) -> None:
    """Reactions, moments of the supports, and all four diagrams at 40 places are sympy's."""
    supports, length, loads = random_beam(seed)
    reactions, moments, other = solved_by_sympy(supports, length, loads)
    result = Beam(supports, length, float(EI)).solve(loads)
    scale = EXACT * max(map(abs, reactions))
    np.testing.assert_allclose(result.reactions[0], reactions, rtol=EXACT, atol=scale)
    np.testing.assert_allclose(result.reaction_moments[0], moments, rtol=EXACT, atol=scale * length)
    x = np.linspace(0.01, length - 0.01, 40)
    for quantity, expression in (
        ("shear", other.shear_force()),
        ("moment", other.bending_moment()),
        ("slope", other.slope()),
        ("deflection", other.deflection()),
    ):
        theirs = -values(expression, x)
        size = EXACT * np.abs(theirs).max()
        ours = result.at(quantity, x)[0]
        np.testing.assert_allclose(ours, theirs, rtol=EXACT, atol=size, err_msg=quantity)
