"""Sections through build-ups."""

from __future__ import annotations

from copy import deepcopy

import pytest
from drawn import boxes, outline, words
from samples import FLOOR_AND_WALL, SECTION, build_ups, figure, statement

from calcbook import figures

KINDS = (("F1", "floor", "level", "6.68"), ("E1", "outside wall", "upright", "4.12"))


def test_every_layer_has_its_words_thickness_and_weight() -> None:
    """Names, thicknesses and weights stand as the statement prints them; no thickness, none."""
    printed = words(figures.draw(build_ups(), SECTION))
    for layer in ("tile on mortar", "slab", "ducts", "partitions", "plaster", "block"):
        assert layer in printed
    assert {"23 mm", "200 mm", "16 mm", "150 mm"} <= set(printed)
    assert {"0.77 kPa", "4.72 kPa", "0.19 kPa", "1.00 kPa", "3.83 kPa"} <= set(printed)
    assert "0 mm" not in printed
    assert printed.count("certain") == 2


def test_loads_and_least_loads_head_each_section() -> None:
    """A build-up is headed by key, words and both loads."""
    printed = words(figures.draw(build_ups(), SECTION))
    assert {"F1", "floor", "6.68 kPa, least 6.68 kPa", "E1", "outside wall"} <= set(printed)


def test_layers_are_drawn_to_the_scale_that_is_said() -> None:
    """200 mm at 1:10 is 20 mm of paper, the tile's 23 mm a little over two."""
    svg = figures.draw(build_ups(), SECTION)
    assert any("Sections 1:10 " in one for one in words(svg))
    for name, thickness, across in (("F1-1", 2.3, 1), ("F1-2", 20.0, 1), ("E1-2", 15.0, 0)):
        points = [point[across] for point in outline(svg, f"layer-{name}")]
        assert max(points) - min(points) == pytest.approx(thickness, abs=0.01)


def test_layers_touch_in_their_order() -> None:
    """The slab begins where the tile ends; a wall's block begins where its plaster ends."""
    svg = figures.draw(build_ups(), SECTION)
    tile, slab = (outline(svg, f"layer-F1-{n}") for n in (1, 2))
    assert max(y for _, y in tile) == pytest.approx(min(y for _, y in slab), abs=0.01)
    plaster, block = (outline(svg, f"layer-E1-{n}") for n in (1, 2))
    assert max(x for x, _ in plaster) == pytest.approx(min(x for x, _ in block), abs=0.01)


def test_labels_keep_the_order_of_the_layers() -> None:
    """From the top down the words stand as the layers lie."""
    tops = {box.words: box.top for box in boxes(figures.draw(build_ups(), SECTION))}
    order = ["tile on mortar", "slab", "ducts", "partitions", "plaster", "block"]
    assert [tops[one] for one in order] == sorted(tops[one] for one in order)


def test_partitions_that_are_live_load_say_so() -> None:
    """Where partitions are not in the load the figure says where they are."""
    assert "live load" in words(figures.draw(build_ups(share=0.0), SECTION))
    assert "live load" not in words(figures.draw(build_ups(), SECTION))


def test_missing_values_are_said_and_the_rest_is_drawn() -> None:
    """A layer without weight, one without thickness: words for each, the others stand."""
    spoilt = build_ups()
    layers = spoilt["parts"][1]["items"][1]
    for name, row in (("t", 1), ("g", 4)):
        column = next(c for c in layers["columns"] if c["name"] == name)
        column["si"][row], column["texts"][row] = None, ""
        column["problem"] = ["bad unit" if n == row else None for n in range(len(column["si"]))]
    printed = words(figures.draw(spoilt, SECTION))
    assert "F1.2 is drawn without thickness: bad unit." in printed
    assert "E1.5 is drawn without its weight: bad unit." in printed
    assert "no weight" in printed
    assert "block" in printed
    assert "F1.2 is drawn without thickness" in figures.describe(spoilt, SECTION)


def test_a_load_that_is_missing_is_left_blank() -> None:
    """A build-up whose load has no value is drawn and says that it has none."""
    spoilt = build_ups()
    column = spoilt["parts"][1]["items"][2]["columns"][0]
    column["si"][0], column["problem"] = None, ["row F1: no material", None]
    assert "no load, least 6.68 kPa" in words(figures.draw(spoilt, SECTION))


def test_layers_without_a_home_and_homes_without_layers_are_said() -> None:
    """A layer of a build-up that is not there, and a build-up without layers, are named."""
    stray = build_ups([*FLOOR_AND_WALL, ("X", "stray", "5", "0.1", "self", "no")])
    assert "X.7 is not drawn: there is no build-up 'X'." in words(figures.draw(stray, SECTION))
    empty = build_ups(kinds=(*KINDS, ("Z", "nothing", "level", "0")))
    assert "Z is not drawn: it has no layers." in words(figures.draw(empty, SECTION))


def test_what_does_not_fit_is_said() -> None:
    """Forty build-ups do not fit a page, which is said; those drawn are not tiny for it."""
    rows = [(f"T{n}", "slab", "200", "4.72", "self", "yes") for n in range(40)]
    kinds = tuple((f"T{n}", "floor", "level", "4.72") for n in range(40))
    said = " ".join(words(figures.draw(build_ups(rows, kinds), SECTION)))
    assert "not drawn: the sheet is full." in said
    assert "Sections 1:" in said
    assert "1:200" not in said
    assert "more, with layers as listed" in figures.describe(build_ups(rows, kinds), SECTION)


def test_nothing_to_draw_is_said() -> None:
    """Without schedules, or while they do not apply, one sentence says why."""
    away = deepcopy(build_ups())
    away["parts"][1]["items"][1].update(applies=False, why="there are no floors")
    for source, why in ((statement(), "no schedule of this name"), (away, "there are no floors")):
        printed = words(figures.draw(source, SECTION))
        assert len(printed) == 1
        assert why in printed[0]
        assert why in figures.describe(source, SECTION)


def test_alt_text_lists_build_ups_with_their_layers() -> None:
    """The figure in words has loads, order and layers; walls begin outside."""
    said = figures.describe(build_ups(), SECTION)
    assert said.startswith("Sections to scale through 2 build-ups.")
    assert "F1 floor, 6.68 kPa, from the top: tile on mortar, 23 mm, 0.77 kPa; slab" in said
    assert "E1 outside wall, 4.12 kPa, from outside: plaster, 16 mm, 0.29 kPa; block" in said


def test_only_what_is_needed() -> None:
    """Without words, surfaces and parts a layer goes by its key."""
    plain = figure(
        "build-up-section", build_ups="types", load="D", layers="layers", layer_of="of",
        thickness="t", weight="g",
    )  # fmt: skip
    printed = words(figures.draw(build_ups(), plain))
    assert {"F1.1", "F1.2", "E1.5", "6.68 kPa"} <= set(printed)
    assert not any("least" in one for one in printed)
