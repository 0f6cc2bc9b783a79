"""Trusses against published values, sympy and a dense force method."""

from __future__ import annotations

import numpy as np
import pytest
from sympy.physics.continuum_mechanics.truss import Truss as SympyTruss
from truss_samples import by_forces, down, gable_of_13, grown, howe_roof, lettered, random_loads

from calcbook.statics.generators import flat
from calcbook.statics.truss import Truss
from calcbook.statics.truss_tables import Held

EXACT = 1e-9
SYMPY = 1e-7  # sympy's truss solver leaves noise of this size

PUBLISHED_GABLE = [
    (8.0, 6.0, (100, 200, 300), 450, {"AB": -583.3333, "AC": 466.6667, "BE": -166.6667,
                                      "BD": -416.6667, "DE": 200, "BC": 0}),
    (3.0, 2.0, (5, 10, 10), 20, {"AB": -27.0416, "AC": 22.5, "BE": -9.0139, "BD": -18.0278,
                                 "DE": 10, "BC": 0}),
]  # fmt: skip

HOWE = {"AB": -931.695, "AH": 833.3333, "BC": -708.0882, "JK": 633.3333, "CJ": 400.0,
        "DE": -409.9458, "CD": -409.9458, "EF": -521.7492, "CK": -377.1236, "BJ": -223.6068,
        "DK": 366.6667, "EK": -141.4214, "KL": 466.6667, "BH": 0.0, "EL": 0.0, "FM": 0.0,
        "FL": 0.0}  # fmt: skip


@pytest.mark.parametrize(("b", "h", "loads", "reaction", "forces"), PUBLISHED_GABLE)
def test_the_published_gable(
    b: float, h: float, loads: tuple[float, ...], reaction: float, forces: dict[str, float]
) -> None:
    """The forces of the gable are those of Baker and Haynes, Engineering Statics, chapter 6."""
    truss = gable_of_13(b, h)
    ends, sides, ridge = loads
    found = truss.solve(down(truss, A=ends, H=ends, B=sides, F=sides, D=ridge))
    assert found.reaction("A") == pytest.approx([0, reaction], abs=1e-9)
    for member, force in forces.items():
        assert found.force(member) == pytest.approx(force, abs=5.1e-5), member


def test_the_closed_form_of_the_gable() -> None:
    """Every member follows the closed form of Baker and Haynes for any size and load."""
    b, h, ends, sides, ridge = 2.7, 1.9, 3.1, 8.3, 11.7
    truss = gable_of_13(b, h)
    found = truss.solve(down(truss, A=ends, H=ends, B=sides, F=sides, D=ridge))
    angle, reaction = np.arctan(h / b), (2 * ends + 2 * sides + ridge) / 2
    rafter = (ends - reaction) / np.sin(angle)
    strut = -sides * np.cos(angle) / np.sin(2 * angle)
    upper = rafter + sides * np.sin(angle) - strut * np.cos(2 * angle)
    tie = -rafter * np.cos(angle)
    wanted = {"AB": rafter, "FH": rafter, "AC": tie, "CE": tie, "EG": tie, "GH": tie, "BE": strut,
              "EF": strut, "BD": upper, "DF": upper, "DE": -(ridge + 2 * upper * np.sin(angle)),
              "BC": 0.0, "FG": 0.0}  # fmt: skip
    for member, force in wanted.items():
        assert found.force(member) == pytest.approx(force, rel=EXACT, abs=1e-9), member
    assert found.zero_always == ("BC", "FG")


def test_the_published_howe_roof() -> None:
    """The forces of the Howe roof are those of Baker and Haynes by the method of sections."""
    truss = howe_roof(3.0, 4.5)
    found = truss.solve(down(truss, B=200, J=300, E=150))
    assert found.reaction("A")[1] == pytest.approx(416.6667, abs=5.1e-5)
    assert found.reaction("G")[1] == pytest.approx(233.3333, abs=5.1e-5)
    for member, force in HOWE.items():
        assert found.force(member) == pytest.approx(force, abs=5.1e-4), member
    assert set(found.zero_always) == {"BH", "EL", "FM", "FL"}


def test_a_king_post() -> None:
    """A king post truss with 10 N at its ridge gives what equilibrium of two joints gives."""
    places = {"A": (0.0, 0.0), "B": (4.0, 0.0), "C": (8.0, 0.0), "D": (4.0, 3.0)}
    truss = lettered(places, "AD DC AB BC BD", [Held("A", "pinned"), Held("C", "roller")])
    found = truss.solve(down(truss, D=10))
    assert found.forces[0] == pytest.approx([-25 / 3, -25 / 3, 20 / 3, 20 / 3, 0], abs=1e-12)
    assert found.senses() == ("compression", "compression", "tension", "tension", "zero")
    assert found.reactions[0, :, 1] == pytest.approx([5, 5])


def in_sympy(truss: Truss, loads: np.ndarray) -> dict[str, float]:
    """Return the member forces that sympy's truss gives, tension positive."""
    other = SympyTruss()
    xy = np.asarray(truss.joints.xy)
    other.add_node(*((label, *place) for label, place in zip(truss.joints.labels, xy, strict=True)))
    table = truss.members
    other.add_member(*zip(table.labels, table.starts, table.ends, strict=True))
    other.apply_support(*((held.joint, held.kind) for held in truss.supports))
    for label, (fx, fy) in zip(truss.joints.labels, loads, strict=True):
        other.apply_load((label, fx, 0), (label, fy, 90))
    other.solve()
    return {str(label): float(force) for label, force in other.internal_forces.items()}


@pytest.mark.parametrize("seed", range(50))
def test_random_determinate_trusses_against_sympy(seed: int) -> None:
    """Fifty random determinate trusses have the forces that sympy's truss gives."""
    truss = grown(seed)
    loads = random_loads(truss, seed)
    found = truss.solve(loads)
    assert truss.determinate
    theirs = in_sympy(truss, loads[0])
    wanted = [theirs[label] for label in truss.members.labels]
    np.testing.assert_allclose(found.forces[0], wanted, rtol=0, atol=SYMPY * found.scale[0])


@pytest.mark.parametrize("seed", range(40))
def test_random_trusses_against_the_force_method(seed: int) -> None:
    """Indeterminate trusses, with a roller at any angle, have the forces of least energy."""
    truss = grown(seed, more=1 + seed % 4, turned=True)
    loads = random_loads(truss, seed, cases=3)
    found = truss.solve(loads)
    for case in range(3):
        wanted = by_forces(truss, loads[case])
        np.testing.assert_allclose(
            found.forces[case], wanted, rtol=0, atol=EXACT * found.scale[case]
        )


@pytest.mark.parametrize("seed", range(20))
def test_two_ways_agree(seed: int) -> None:
    """Equilibrium of the joints gives a determinate truss the forces and reactions of stiffness."""
    truss = grown(seed, turned=True)
    loads = random_loads(truss, seed, cases=2)
    found = truss.solve(loads)
    forces, reactions = truss.by_joints(loads)
    tolerance = EXACT * found.scale.max()
    np.testing.assert_allclose(forces, found.forces, rtol=0, atol=tolerance)
    np.testing.assert_allclose(reactions, found.reactions, rtol=0, atol=tolerance)


def test_a_long_truss_against_the_force_method() -> None:
    """A truss too large for a full matrix has the forces of least energy too."""
    shape = flat(150.0, 2.0, 75)
    plain = shape.truss(5e8)
    starts, ends = list(plain.members.starts), list(plain.members.ends)
    more = [(f"U{k}", f"L{k + 1}") for k in range(40)]
    more = [pair for pair in more if pair not in set(zip(starts, ends, strict=True))]
    table = type(plain.members)(
        [f"M{n}" for n in range(len(starts) + len(more))],
        [*starts, *(a for a, _ in more)],
        [*ends, *(b for _, b in more)],
        np.random.default_rng(3).uniform(1e8, 9e8, len(starts) + len(more)),
    )
    truss = Truss(plain.joints, table, plain.supports)
    loads = random_loads(truss, 3)
    found = truss.solve(loads)
    assert truss.redundancy == len(more)
    assert len(truss.crossings) == len(more)
    np.testing.assert_allclose(
        found.forces[0], by_forces(truss, loads[0]), rtol=0, atol=1e-8 * found.scale[0]
    )
    assert found.residual < 1e-12


def test_a_slender_truss_is_no_mechanism() -> None:
    """A thousand panels in a row are soft, sound, and balance."""
    truss = flat(2000.0, 2.0, 1000).truss(1e9)
    middle = truss.joints.labels.index("L500")
    loads = np.zeros((1, len(truss.xy), 2))
    loads[0, middle, 1] = -1000.0
    found = truss.solve(loads)
    assert found.force("L499-L500") == pytest.approx(500 * 998 / 2, rel=1e-6)
    assert found.residual < 1e-10


def test_deflection_by_virtual_work() -> None:
    """A joint moves by the sum of N n L / EA, n being the forces of a unit load there."""
    truss = grown(11, more=2, turned=True)
    loads = random_loads(truss, 11)
    unit = np.zeros_like(loads)
    unit[0, 3, 1] = 1.0
    found, virtual = truss.solve(loads), truss.solve(unit)
    work = (found.forces * virtual.forces * truss.lengths / truss.ea).sum()
    assert found.displacements[0, 3, 1] == pytest.approx(work, rel=EXACT)


def test_combinations_and_the_envelope() -> None:
    """The envelope of three combinations names the highest and lowest and their rows."""
    truss = gable_of_13(3, 2)
    cases = np.concatenate((down(truss, B=10, D=10, F=10), down(truss, D=-40)))
    combined = truss.solve(cases).combined([[1.4, 0], [1.2, 1.0], [0.9, 1.0]])
    envelope = combined.envelope()
    for row in range(len(truss.members.labels)):
        forces = list(combined.forces[:, row])
        assert envelope.highest[row] == max(forces) == forces[envelope.highest_case[row]]
        assert envelope.lowest[row] == min(forces) == forces[envelope.lowest_case[row]]
    rafter = truss.members.labels.index("AB")
    assert (envelope.lowest_case[rafter], envelope.highest_case[rafter]) == (0, 2)


def test_cases_that_cancel_leave_nothing() -> None:
    """Cases that cancel in a combination give members without force, not small ones."""
    truss = gable_of_13(3, 2)
    loads = random_loads(truss, 2)
    combined = truss.solve(np.concatenate((loads, 3 * loads))).combined([[3, -1]])
    assert combined.zero.all()
    assert set(combined.senses()) == {"zero"}


def test_loads_at_one_joint_are_added() -> None:
    """Two rows at one joint in one case are added, in another case they are not."""
    truss = gable_of_13(3, 2)
    loads = truss.loads([(0, "D", 1.0, -2.0), (0, "D", 3.0, -4.0), (1, "D", 5.0, 0.0)], 2)
    row = truss.joints.labels.index("D")
    assert loads[:, row].tolist() == [[4, -6], [5, 0]]
    assert np.count_nonzero(loads) == 3


def test_a_result_keeps_its_loads() -> None:
    """Loads changed after the solution do not change the result."""
    truss = gable_of_13(3, 2)
    loads = down(truss, D=10)
    found = truss.solve(loads)
    loads[:] = 99.0
    assert found.loads.sum() == -10
    assert found.residual < 1e-12


def test_a_case_without_loads_is_all_zero() -> None:
    """A case without loads gives no force, no reaction, no movement."""
    truss = gable_of_13(3, 2)
    found = truss.solve(np.zeros((2, 8, 2)))
    assert not found.forces.any()
    assert not found.reactions.any()
    assert not found.displacements.any()
    assert found.residual == 0
    assert found.zero.all()


def test_members_that_meet_without_a_joint_are_listed() -> None:
    """Crossing members, and a member through a joint it is not joined to, are listed."""
    places = {"A": (0.0, 0.0), "B": (2.0, 0.0), "C": (2.0, 2.0), "D": (0.0, 2.0), "E": (1.0, 0.0)}
    supports = [Held("A", "pinned"), Held("B", "roller")]
    truss = lettered(places, "AB BC CD DA AC BD EC ED", supports)
    assert set(truss.crossings) == {("AC", "BD"), ("AC", "ED"), ("BD", "EC")}
    assert truss.passed == (("E", "AB"),)
    assert truss.solve(down(truss, C=1)).residual < 1e-12
