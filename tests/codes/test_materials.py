from __future__ import annotations

from typing import TYPE_CHECKING

import pytest

from calcbook import codes
from calcbook.units import kind, read_quantity

if TYPE_CHECKING:
    from collections.abc import Callable

CODES = [codes.get(name) for name in codes.names()]
BOTH = pytest.mark.parametrize("code", CODES, ids=codes.names())
ASCE, NSCP = codes.get("ASCE 7-16"), codes.get("NSCP 2015")
GRAVITY = 9.80665


def test_weights_are_the_published_ones(published: Callable) -> None:
    """Each listed weight is met exactly in the system it was listed in."""
    for row in published("dead_loads"):
        material = codes.get(row["code"]).materials()[row["material"]]
        weight = material.weight if row["system"] == "SI" else material.weight_us
        expected = read_quantity(row["weight"])
        assert read_quantity(weight).si == pytest.approx(expected.si, rel=1e-9), row
        if row["status"] == "from memory" and row["system"] == "US":
            assert material.from_memory, row


@BOTH
def test_every_material_is_complete(code: codes.CodeSet) -> None:
    """Each has words, a source, and a weight of its kind, alike in both systems as printed.

    Unit weights agree within 0.8 % (5.7 for 36 pcf is the widest); weights per area are printed
    to 0.01 kN/m2, and a printed 6 psf beside its two-figure 0.29 stays within that.
    """
    for name, material in code.materials().items():
        assert material.name == name
        assert material.words
        assert material.clause.split()[0] in {"NSCP", "ASCE", "HUD", "ASHRAE"}
        dimension = kind(material.kind).dimension
        si = read_quantity(material.weight, dimension).si
        us = read_quantity(material.weight_us, dimension).si
        if material.kind == "unit weight":
            assert us == pytest.approx(si, rel=0.008), name
        else:
            assert us == pytest.approx(si, abs=5.1), name


def test_one_edition_mirrors_the_other() -> None:
    """NSCP lists all that ASCE does, its own figures first, mirrored ones from memory."""
    nscp, asce = NSCP.materials(), ASCE.materials()
    assert set(asce) < set(nscp)
    mirrored = nscp["asphalt shingles"]
    assert (mirrored.weight, mirrored.clause) == ("0.10 kN/m2", "NSCP 2015 Table 204-2")
    assert mirrored.from_memory
    assert not asce["asphalt shingles"].from_memory
    assert nscp["gypsum wallboard"].weight == "8.0 kN/m3"
    assert nscp["gypsum wallboard"].clause == "NSCP 2015 Table 204-2"
    assert not nscp["reinforced concrete"].from_memory
    assert nscp["copper"].clause == "HUD Residential Structural Design Guide Table 3.3"


def test_walls_and_footings_follow_from_the_density(published: Callable) -> None:
    """Published concrete walls lie between 145 and 150 pcf, footings are 145 pcf to 0.5 plf."""
    for inches in (6, 8, 10, 12):
        wall = read_quantity(ASCE.materials()[f"concrete wall, {inches} in"].weight_us).si
        thickness = read_quantity(f"{inches} in").si
        low, high = (read_quantity(f"{pcf} pcf").si * thickness for pcf in (145, 150))
        assert low * 0.999 <= wall <= high * 1.001, inches
    for row in published("footings"):
        area = float(row["width_in"]) * float(row["depth_in"]) / 144.0
        assert 145.0 * area == pytest.approx(float(row["plf"]), abs=0.5), row


def test_densities_lie_in_handbook_ranges() -> None:
    """Handbook densities (kg/m3, from a library) times gravity bracket ours within 5 %."""
    listed = pytest.importorskip("ht.insulation").building_materials
    handbook = {
        "structural steel": ("Metals, steel",),
        "glass": ("Glass, soda lime",),
        "aluminium": ("Metals, aluminium alloys",),
        "reinforced concrete": tuple(f"Concrete, reinforced with {n}% steel" for n in (1, 2)),
        "gypsum wallboard": ("Gypsum, 600 kg/m^3", "Gypsum, plasterboard"),
        "plywood": ("Wood, plywood 500 kg/m^3", "Wood, plywood 700 kg/m^3"),
    }
    for code in CODES:
        for name, entries in handbook.items():
            densities = [listed[entry][0] * GRAVITY for entry in entries]
            ours = read_quantity(code.materials()[name].weight).si
            low, high = min(densities), max(densities)
            assert 0.95 * low <= ours <= 1.05 * high, name


def test_concrete_and_steel_of_common_practice() -> None:
    """2400 kg/m3 and 7850 kg/m3 at 9.81 are within 0.5 % of the code's figures."""
    for code in CODES:
        concrete = read_quantity(code.materials()["reinforced concrete"].weight).si
        steel = read_quantity(code.materials()["structural steel"].weight).si
        assert concrete == pytest.approx(2400 * 9.81, rel=0.005)
        assert steel == pytest.approx(7850 * 9.81, rel=0.005)
