"""The section along the wind with its pressures."""

# ruff: noqa: RUF001  figures print true minus signs

from __future__ import annotations

import math
import random
from copy import deepcopy
from typing import Any

import pytest
from drawn import named, outline, outside, overlaps, shafts, words
from samples import (
    FLAT,
    GABLE,
    PSF,
    WALLS,
    changed,
    column,
    figure,
    flipped,
    gable,
    line,
    schedule,
    statement,
    value,
    wind,
)

from calcbook import figures

OUT_OF_WALL = {"windward": (-1.0, 0.0), "leeward": (1.0, 0.0)}


def drawn(items: list[dict[str, Any]], item: dict[str, Any] = GABLE) -> bytes:
    """Return the figure of a wind workbook of these items."""
    return figures.draw(statement(*items), item)


def sentences(items: list[dict[str, Any]], item: dict[str, Any] = GABLE) -> str:
    """Return all words of the figure as one text."""
    return " ".join(words(drawn(items, item)))


def test_values_are_the_statements_texts() -> None:
    """Every pressure stands at its surface exactly as printed, with its unit."""
    printed = words(drawn(wind(), FLAT))
    for text in ("1.476", "1.649", "1.796", "1.908", "15.6", "8.1"):
        assert text in printed
    for label in ("−1.190 kPa", "−1.670 kPa", "0.505 kPa", "−0.505 kPa", "−1.193 kPa"):
        assert label in printed
    assert printed.count("−2.147 kPa") == 2
    assert printed.count("−0.429 kPa") == 3
    assert "depth 24.5 m" in printed


@pytest.mark.parametrize("turned", [False, True])
def test_wall_arrows_follow_the_sign(turned: bool) -> None:
    """Toward the surface for +, away from it for -, on both walls."""
    items = flipped(wind()) if turned else wind()
    found = shafts(drawn(items, FLAT))
    for face, positive in (("windward", not turned), ("leeward", turned)):
        arrows = {name: one for name, one in found.items() if name.startswith(face)}
        assert len(arrows) == 4
        for name, one in arrows.items():
            outward = one.along[0] * OUT_OF_WALL[face][0]
            assert (outward < 0.0) == positive
            assert name.endswith("-toward" if positive else "-away")


@pytest.mark.parametrize("turned", [False, True])
def test_roof_arrows_follow_the_sign(turned: bool) -> None:
    """Uplift points up and out of the slope, pressure down onto it, square to the roof."""
    items = flipped(gable()) if turned else gable()
    found = {name: one for name, one in shafts(drawn(items)).items() if name.startswith("roof")}
    assert {name.split("-")[1] for name in found} == {"1", "2"}
    for name, one in found.items():
        upward = name.endswith("away")
        assert (one.along[1] < 0.0) == upward
        tilt = math.degrees(math.atan2(abs(one.along[0]), abs(one.along[1])))
        assert tilt == pytest.approx(22.0, abs=0.5)


@pytest.mark.parametrize("turned", [False, True])
def test_internal_arrows_follow_the_sign(turned: bool) -> None:
    """Internal pressure pushes all surfaces outward, internal suction draws them in."""
    items = flipped(wind()) if turned else wind()
    found = shafts(drawn(items, FLAT))
    for number, positive in (("1", not turned), ("2", turned)):
        sense = "toward" if positive else "away"
        assert (found[f"internal-{number}-windward-{sense}"].along[0] < 0.0) == positive
        assert (found[f"internal-{number}-leeward-{sense}"].along[0] > 0.0) == positive
        assert (found[f"internal-{number}-roof-{sense}"].along[1] < 0.0) == positive


def test_side_wall_is_seen_end_on() -> None:
    """Suction on the wall facing the reader is a dot, pressure a cross, each explained."""
    assert "side-1-away" in named(drawn(wind(), FLAT))
    assert "A dot is an arrow toward the reader" in sentences(wind(), FLAT)
    assert "side-1-toward" in named(drawn(flipped(wind()), FLAT))
    assert "A cross is an arrow away from the reader" in sentences(flipped(wind()), FLAT)


def test_lengths_are_to_scale() -> None:
    """Two pressures on one wall have arrows in the ratio of their values."""
    found = shafts(drawn(wind(), FLAT))
    low, high = found["windward-1-toward"], found["windward-4-toward"]
    assert low.along[0] / high.along[0] == pytest.approx(1.476 / 1.908, rel=1e-5)


def test_zero_has_a_value_and_no_arrow() -> None:
    """A pressure of zero is printed but points nowhere."""
    svg = drawn(changed(wind(), "p_l", value=value("0.000", "kPa", 0.0)), FLAT)
    assert "0.000 kPa" in words(svg)
    assert not [name for name in shafts(svg) if name.startswith("leeward")]


def test_what_prints_as_zero_has_no_arrow() -> None:
    """A pressure too small to be printed points nowhere, and a dot for it is not explained."""
    small = value("0.000", "kPa", -0.04)
    items = changed(changed(wind(), "p_l", value=small), "p_s", value=small)
    svg = drawn(items, FLAT)
    assert words(svg).count("0.000 kPa") == 2
    assert not [name for name in named(svg) if name.startswith(("leeward", "side"))]
    assert "A dot is" not in sentences(items, FLAT)


def test_open_arrows_are_explained() -> None:
    """The note says what open arrows stand for, and nothing of them where there is none."""
    assert "Open arrows are the roof's alternative 2 and the further internal" in sentences(
        wind(), FLAT
    )
    bare = {role: name for role, name in WALLS.items() if not role.startswith("p_internal")}
    assert "Open arrows" not in sentences(wind(), figure("wind-elevation", **bare))


@pytest.mark.parametrize("turned", [False, True])
def test_leaders_end_at_the_highest_arrow_of_their_zone(turned: bool) -> None:
    """The line from a zone's values ends where its highest arrow does."""
    svg = drawn(flipped(gable()) if turned else gable())
    found = [one for name, one in shafts(svg).items() if name.startswith("roof-1-")]
    end = min((point for one in found for point in (one.tail, one.head)), key=lambda p: p[1])
    assert outline(svg, "leader-windward slope")[-1] == pytest.approx(end, abs=1e-3)


def test_roof_is_drawn_from_pitch_depth_and_eave() -> None:
    """A flat roof is level; a gable's slopes have the pitch, and its ridge is over the middle."""
    (_, eave), (_, middle), (_, far) = outline(drawn(wind(), FLAT), "roof")
    assert eave == middle == far
    start, ridge, end = outline(drawn(gable()), "roof")
    assert ridge[0] == pytest.approx((start[0] + end[0]) / 2.0)
    rise, run = start[1] - ridge[1], ridge[0] - start[0]
    assert math.degrees(math.atan2(rise, run)) == pytest.approx(22.0, abs=0.01)
    assert "Roof pitch 22°. " in sentences(gable()) + " "
    assert "different scales" not in sentences(gable())


def test_flat_shape_wins_over_a_pitch() -> None:
    """Where the roof's shape is chosen flat, a pitch left in its field is not drawn."""
    shape = {"kind": "choice", "name": "roof_form", "option": "flat", "applies": True}
    item = figure("wind-elevation", **WALLS, theta="theta", roof_shape="roof_form")
    assert "Roof pitch" not in sentences([*gable(), shape], item)
    assert "Roof pitch 22°" in sentences([*gable(), {**shape, "option": "gable"}], item)


def test_missing_values_are_said_in_place_of_arrows() -> None:
    """What does not apply, has a problem or no value has no arrow, and words instead."""
    items = changed(gable(), "p_i", applies=False, why="enclosure is 'open'")
    items = changed(items, "p_l", problem="not available because V is missing")
    items = changed(items, "p_rw2", value=value("", "kPa", None))
    svg = drawn(items)
    assert words(svg).count("not drawn") == 3
    said = " ".join(words(svg))
    assert "Inside 1 not drawn: it does not apply (enclosure is 'open')." in said
    assert "Leeward wall not drawn: not available because V is missing." in said
    assert "Roof windward slope, alternative 2, not drawn: it has no value." in said
    assert not [n for n in shafts(svg) if n.startswith(("leeward", "internal-1", "roof-1-2"))]


def test_name_that_is_not_there_is_said() -> None:
    """A role whose name the statement lacks is told, not raised."""
    said = sentences([one for one in gable() if one["name"] != "p_s"])
    assert "Side walls not drawn: there is no value of this name." in said


def test_section_that_does_not_apply_takes_its_values_along() -> None:
    """Values of a section whose condition does not hold are left out with its reason."""
    source = statement(*gable())
    away = {"kind": "section", "applies": False, "why": "roof is 'flat'", "items": []}
    items = source["parts"][1]["items"]
    away["items"] = [items.pop(next(n for n, one in enumerate(items) if one["name"] == "p_rl"))]
    source["parts"].append(away)
    said = " ".join(words(figures.draw(source, GABLE)))
    assert "Roof leeward slope not drawn: it does not apply (roof is 'flat')." in said


@pytest.mark.parametrize(
    ("name", "spoilt", "reason"),
    [
        ("theta", value("", "deg", None), "Roof not drawn: the pitch is not known"),
        ("theta", value("88", "deg", math.radians(88.0)), "a pitch of 88° is no roof to draw"),
        ("theta", value("-5", "deg", math.radians(-5.0)), "a pitch of −5° is no roof to draw"),
        ("L", value("-24.5", "m", -24.5), "−24.5 m is not a length to draw"),
        ("L", value("0", "m", 0.0), "Roof not drawn: the depth along the wind is not known."),
        ("h_e", value("-15.6", "m", -15.6), "−15.6 m is not a length to draw"),
    ],
)
def test_shape_that_cannot_be_drawn_is_said(name: str, spoilt: dict[str, Any], reason: str) -> None:
    """A pitch, depth or height that makes no building is told in words."""
    assert reason in sentences(changed(gable(), name, value=spoilt))


def test_no_roof_arrows_without_a_roof() -> None:
    """Where the roof is not drawn, neither are its pressures, on either side of it."""
    svg = drawn(changed(gable(), "theta", value=value("", "deg", None)))
    assert "roof" not in named(svg)
    assert not [name for name in shafts(svg) if "roof" in name]


def test_zones_follow_each_other_from_the_windward_edge() -> None:
    """Zones take their widths to scale; one without width is not drawn but named."""
    svg = drawn(wind(), FLAT)
    assert "Roof, over 2h: it has no length on this roof." in words(svg)
    assert "over 2h" not in words(svg)
    found = shafts(svg)
    left, right = (outline(svg, "roof")[end][0] for end in (0, -1))
    for strip, middle in (("1", 3.9 / 24.5), ("2", 11.7 / 24.5)):
        one, other = (found[f"roof-{strip}-{number}-away"].tail[0] for number in (1, 2))
        assert one < other
        place = (one + other) / 2.0
        assert (place - left) / (right - left) == pytest.approx(middle, abs=1e-4)


@pytest.mark.parametrize("texts", [["7.8", "7.8", "8.9", "9.0"], ["7.8", "", "8.9", "7.8"]])
def test_zones_that_do_not_fill_the_roof_are_not_passed_off_as_to_scale(texts: list[str]) -> None:
    """Widths that miss the depth, or are missing, give even zones and a word of it."""
    items = wind()
    items[-1]["columns"][0] = column("w", "m", texts)
    said = sentences(items, FLAT)
    assert "Lengths of the roof zones are not to scale." in said
    assert "−0.716 kPa" in said


def test_zones_may_be_given_by_start_and_end() -> None:
    """Starts and ends draw what the widths draw, cut off at the roof's end."""
    items, fellows = wind(), {**FLAT["uses"], "zone_p": "p1", "zone_p_2": "p2"}
    items[-1]["columns"] += [
        column("b", "m", ["0.0", "7.8", "15.6", "31.2"]),
        column("e", "m", ["7.8", "15.6", "31.2", "62.4"]),
    ]
    del fellows["zone_width"]
    item = figure("wind-elevation", **fellows, zone_start="b", zone_end="e")
    assert drawn(items, item) == drawn(wind(), FLAT)


def test_numbered_zones_take_the_heading_of_their_column() -> None:
    """A strip with a bare number is called as its column is headed."""
    items = changed(wind(), "roof", rows=["1", "2", "3", "4"], key="Strip")
    printed = words(drawn(items, FLAT))
    assert {"Strip 1", "Strip 2", "Strip 3"} <= set(printed)


def test_zones_may_be_given_by_name() -> None:
    """Zones given as labels and names are drawn in order, and not passed off as to scale."""
    zones = {"edge": ["p_rw", "p_rw2"], "field": "p_rl"}
    item = figure("wind-elevation", **WALLS, roof_zones=zones)
    printed = words(drawn(wind(), item))
    assert {"edge", "field", "−0.846 kPa", "0.431 kPa", "−1.343 kPa"} <= set(printed)
    assert "Lengths of the roof zones are not to scale." in printed


def test_column_may_stand_in_a_schedule_of_the_same_rows() -> None:
    """Windward pressures listed apart, level by level, are found by their rows."""
    items = wind()
    apart = schedule("windward", items[0]["rows"], items[0]["columns"].pop())
    assert drawn([*items, apart], FLAT) == drawn(wind(), FLAT)
    other = schedule("windward", ["1", "2", "3", "4"], apart["columns"][0])
    assert "'levels' has no column of this name" in sentences([*items, other], FLAT)


def ridge(option: str) -> dict[str, Any]:
    """Return the choice of the ridge's direction."""
    return {"kind": "carried", "name": "ridge", "option": option, "applies": True}


RIDGED = figure("wind-elevation", **WALLS, theta="theta", rise="r", ridge="ridge", along="X")


def test_ridge_along_the_wind_shows_no_slopes() -> None:
    """Seen along the ridge the roof is level, as high as it rises, over a line at the eaves."""
    items = [*gable(), line("r", "3.2", "m", 3.2), ridge("X")]
    svg = drawn(items, RIDGED)
    heights = [y for _, y in outline(svg, "roof")]
    eave = outline(svg, "eave")[0][1]
    width = outline(svg, "roof")[-1][0] - outline(svg, "roof")[0][0]
    assert max(heights) == min(heights)
    assert eave - heights[0] == pytest.approx(3.2 / 24.5 * width, rel=1e-4)
    assert "The ridge runs along the wind." in " ".join(words(svg))


def test_ridge_across_the_wind_shows_the_gable() -> None:
    """With the ridge across the wind the slopes show, where rise and pitch agree."""
    rise = 24.5 / 2.0 * math.tan(math.radians(22.0))
    items = [*gable(), line("r", "4.95", "m", rise), ridge("Y")]
    start, top, _ = outline(drawn(items, RIDGED), "roof")
    pitch = math.degrees(math.atan2(start[1] - top[1], top[0] - start[0]))
    assert pitch == pytest.approx(22.0, abs=0.01)
    assert "eave" not in named(drawn(items, RIDGED))


def test_rise_that_is_not_the_pitchs_is_refused_in_words() -> None:
    """A rise from the other direction would draw another building: the roof is left out."""
    svg = drawn([*gable(), line("r", "3.2", "m", 3.2), ridge("Y")], RIDGED)
    assert "Roof not drawn: a rise of 3.2 m is not that of 22° across this depth." in words(svg)
    assert "roof" not in named(svg)


def test_ridge_along_the_wind_without_a_rise_is_said() -> None:
    """Where the rise is missing the roof ends at the eaves, in words."""
    said = sentences([*gable(), ridge("X")], RIDGED)
    assert "The roof above the eaves is not drawn: its rise is not known." in said


def test_internal_pressure_with_both_signs() -> None:
    """One value that acts with either sign has arrows both ways and is printed once."""
    both = {role: name for role, name in WALLS.items() if not role.startswith("p_internal")}
    item = figure("wind-elevation", **both, p_internal_both="p_i")
    svg = drawn(wind(), item)
    assert words(svg).count("0.505 kPa") == 1
    assert "inside, both signs" in words(svg)
    found = shafts(svg)
    assert found["internal-1-windward-toward"].along[0] < 0.0
    assert found["internal-2-windward-away"].along[0] > 0.0
    assert "inside, both signs 0.505 kPa" in figures.describe(statement(*wind()), item)
    missing = changed(wind(), "p_i", value=value("", "kPa", None))
    assert "Inside, both signs not drawn: it has no value." in sentences(missing, item)


def test_level_above_the_eave_has_no_arrow() -> None:
    """A level in the roof has its value in the table, no arrow in the air, and a word of it."""
    svg = drawn(changed(gable(), "h_e", value=value("12.0", "m", 12.0)))
    assert "1.908" in words(svg)
    assert "windward-4-toward" not in shafts(svg)
    assert "Above the eave, so without an arrow: Roof." in " ".join(words(svg))


def test_level_below_the_ground_has_no_arrow() -> None:
    """Wind does not blow on a basement."""
    items = wind(z=("-3.0", "8.1", "11.6", "15.6"))
    assert "windward-1-toward" not in shafts(drawn(items, FLAT))
    assert "Level 2 is below the ground" in sentences(items, FLAT)


def test_us_units_are_shown_as_given() -> None:
    """Feet and psf come through; scale and direction rest on SI."""
    items = [
        schedule(
            "levels",
            ["Roof"],
            column("z", "ft", ["30.0"], 0.3048),
            column("p", "psf", ["25.52"], PSF),
        ),
        line("p_l", "-15.95", "psf", -15.95 * PSF),
    ]
    item = figure("wind-elevation", levels="levels", z="z", p_windward="p", p_leeward="p_l")
    svg = drawn(items, item)
    assert {"z, ft", "psf", "25.52", "−15.95 psf"} <= set(words(svg))
    found = shafts(svg)
    ratio = found["leeward-1-1-away"].along[0] / found["windward-1-toward"].along[0]
    assert ratio == pytest.approx(15.95 / 25.52, rel=1e-5)


def test_typed_entry_is_shown_in_the_workbooks_unit() -> None:
    """An entry typed in feet is dimensioned in the unit the workbook shows it in."""
    items = changed(gable(), "L", value=value("80 ft 5 in", "", 24.511))
    items = changed(items, "L", shown=value("24.51", "m", 24.511))
    assert "depth 24.51 m" in words(drawn(items))


def test_alt_text_names_the_largest_and_where() -> None:
    """The figure in words has the largest pressure drawn, its sense and its place."""
    source = statement(*wind())
    assert (
        "The largest pressure drawn is −2.147 kPa away from the surface: "
        "roof 0 to h/2, alternative 1." in figures.describe(source, FLAT)
    )
    assert (
        "The largest pressure drawn is 1.908 kPa toward the surface: windward wall at Roof."
        in figures.describe(statement(*gable()), GABLE)
    )


def test_alt_text_tells_what_is_left_out() -> None:
    """Who only hears the figure learns of the missing pressure too."""
    source = statement(*changed(gable(), "p_l", problem="not available because V is missing"))
    said = figures.describe(source, GABLE)
    assert "Leeward wall not drawn: not available because V is missing." in said
    assert "−1.190" not in said


def test_nothing_known_is_no_error() -> None:
    """With none of its names in the statement the figure is words alone."""
    svg = drawn([], GABLE)
    assert shafts(svg) == {}
    assert "Windward wall not drawn: there is no schedule of this name." in words(svg)
    assert "Section along the wind." in figures.describe(statement(), GABLE)


@pytest.mark.parametrize("seed", range(12))
def test_any_spoilt_statement_is_drawn(seed: int) -> None:
    """Whatever is missing, turned or out of bounds: no error, no overlap, arrows by sign."""
    chance = random.Random(seed)  # noqa: S311
    items = deepcopy(gable() if seed % 2 else wind())
    for one in items:
        if one["kind"] == "line":
            _spoil(chance, one)
        else:
            for each in one["columns"]:
                for row in range(len(each["si"])):
                    if chance.random() < 0.2:
                        each["si"][row], each["texts"][row] = None, ""
    item = GABLE if seed % 2 else FLAT
    svg = drawn(items, item)
    assert overlaps(svg) == []
    assert outside(svg) == []
    for name, one in shafts(svg).items():
        if name.startswith(("windward", "leeward")):
            outward = one.along[0] * OUT_OF_WALL[name.split("-")[0]][0]
            assert (outward > 0.0) == name.endswith("away")
    assert figures.describe(statement(*items), item)


def _spoil(chance: random.Random, one: dict[str, Any]) -> None:
    kind = chance.choice(["as it is", "gone", "not now", "turned", "huge", "zero"])
    old = one["value"]
    if kind == "gone":
        one["value"] = value("", old["unit"], None)
    elif kind == "not now":
        one["applies"] = False
    elif kind != "as it is":
        factor = {"turned": -1.0, "huge": 1e6, "zero": 0.0}[kind]
        one["value"] = value(f"{old['si'] * factor:.4g}", old["unit"], old["si"] * factor)
