"""What the sections through build-ups show: layers with thickness and weight, or why not."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

from calcbook.figures import lookup
from calcbook.figures.lookup import Missing, Shown, Value

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping

MOST_LAYERS = 40


@dataclass(frozen=True)
class Layer:
    """One layer: its words, thickness and weight, which part it is, whether it is certain.

    ``note`` says where a weight that is not in the load of the build-up goes.
    """

    words: str
    thickness: Value
    weight: Value
    part: str = ""
    certain: str = ""
    note: str = ""

    @property
    def spread(self) -> bool:
        """Whether it is no layer but a weight spread over the floor: movable partitions."""
        return self.part == "partitions"

    @property
    def depth(self) -> float:
        """The thickness to draw, m; 0 where there is none or it is not known."""
        if self.spread or isinstance(self.thickness, Missing):
            return 0.0
        return max(self.thickness.si, 0.0)


@dataclass(frozen=True)
class BuildUp:
    """A build-up with its layers from the top or from outside; ``surface`` is how it lies."""

    key: str
    title: str
    surface: str
    load: Value
    least: Value | None
    layers: tuple[Layer, ...] = ()

    @property
    def upright(self) -> bool:
        """Whether it is a wall."""
        return self.surface == "upright"

    @property
    def depth(self) -> float:
        """The thickness of all layers, m."""
        return sum(layer.depth for layer in self.layers)


@dataclass(frozen=True)
class Sections:
    """The build-ups to draw, and what could not be drawn, in words."""

    build_ups: tuple[BuildUp, ...]
    left_out: tuple[str, ...]


def gather(statement: lookup.Record, uses: Mapping[str, Any]) -> Sections:
    """Look up the build-ups and their layers; what is missing is said, and nothing else stops."""
    keys = lookup.rows(statement, uses["build_ups"])
    layers = lookup.rows(statement, uses["layers"])
    if isinstance(keys, Missing):
        return _nothing(keys)
    if isinstance(layers, Missing):
        return _nothing(layers)
    said: list[str] = []
    by_build_up: dict[str, list[Layer]] = {key: [] for key in keys}
    for key, home, layer in _layers(statement, uses, layers):
        said += _lacking(key, layer)
        if home in by_build_up:
            by_build_up[home].append(layer)
        else:
            said.append(f"{key} is not drawn: there is no build-up '{home}'.")
    drawn = []
    for one in _build_ups(statement, uses, keys):
        own = tuple(by_build_up[one.key])
        if not own:
            said.append(f"{one.key} is not drawn: it has no layers.")
            continue
        if len(own) > MOST_LAYERS:
            said.append(f"{one.key} is drawn without its last {len(own) - MOST_LAYERS} layers.")
        drawn.append(replace(one, layers=own[:MOST_LAYERS]))
    return Sections(tuple(drawn), tuple(said))


def _nothing(lacking: Missing) -> Sections:
    return Sections((), (f"No build-up is drawn: '{lacking.name}': {lacking.why}.",))


def _layers(
    statement: lookup.Record, uses: Mapping[str, Any], keys: tuple[str, ...]
) -> Iterator[tuple[str, str, Layer]]:
    """Yield (key, build-up, layer) row by row."""
    words = {
        role: lookup.words(statement, uses["layers"], uses.get(role, "")) or ("",) * len(keys)
        for role in ("layer_of", "layer", "part", "certain")
    }
    thick = lookup.cells(statement, uses["layers"], uses["thickness"])
    heavy = lookup.cells(statement, uses["layers"], uses["weight"])
    share = lookup.quantity(statement, uses["partitions"]) if "partitions" in uses else None
    live = isinstance(share, Shown) and share.si == 0.0
    for row, key in enumerate(keys):
        part, certain = words["part"][row], words["certain"][row]
        note = "live load" if live and part == "partitions" else ""
        layer = Layer(words["layer"][row] or key, thick[row], heavy[row], part, certain, note)
        yield key, words["layer_of"][row], layer


def _lacking(key: str, layer: Layer) -> Iterator[str]:
    if isinstance(layer.thickness, Missing):
        yield f"{key} is drawn without thickness: {layer.thickness.why}."
    if isinstance(layer.weight, Missing):
        yield f"{key} is drawn without its weight: {layer.weight.why}."


def _build_ups(
    statement: lookup.Record, uses: Mapping[str, Any], keys: tuple[str, ...]
) -> list[BuildUp]:
    home = uses["build_ups"]
    none = ("",) * len(keys)
    titles = lookup.words(statement, home, uses.get("title", "")) or none
    surfaces = lookup.words(statement, home, uses.get("surface", "")) or none
    loads = lookup.cells(statement, home, uses["load"])
    least: tuple[Value | None, ...] = (None,) * len(keys)
    if "least" in uses:
        least = lookup.cells(statement, home, uses["least"])
    rows = zip(keys, titles, surfaces, loads, least, strict=True)
    return [BuildUp(*row) for row in rows]
