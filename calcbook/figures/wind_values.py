"""What the wind elevation shows: pressures on walls, roof zones and inside, and where they act."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from itertools import accumulate
from typing import Any

from calcbook.figures import lookup
from calcbook.figures.lookup import Missing, Shown, Value

_STEEPEST = math.radians(80.0)


@dataclass(frozen=True)
class Pressure:
    """A pressure on a named surface; ``both`` where it acts with either sign."""

    surface: str
    value: Value
    both: bool = False


@dataclass(frozen=True)
class Level:
    """One level of the windward wall: key, height, pressure there."""

    key: str
    z: Shown
    value: Value


@dataclass(frozen=True)
class Zone:
    """A part of the roof, from one share of the depth to another, with its alternatives."""

    label: str
    begin: float
    end: float
    values: tuple[Value, ...]


@dataclass(frozen=True)
class Roof:
    """The roof in section: its pitch, and how far it rises above the eaves, m.

    ``rise`` is that of two slopes meeting over mid-depth, None where no roof can be drawn;
    ``raised`` is that of a ridge along the wind, up to which the end walls are drawn.
    """

    pitch: Shown | None = None
    rise: float | None = 0.0
    raised: float = 0.0


@dataclass(frozen=True)
class Wind:
    """Everything the figure shows, and what it does not, in words."""

    levels: tuple[Level, ...]
    leeward: tuple[Pressure, ...]
    side: tuple[Pressure, ...]
    internal: tuple[Pressure, ...]
    zones: tuple[Zone, ...]
    depth: Shown | None
    eave: Shown | None
    roof: Roof
    notes: tuple[str, ...]

    @property
    def wall(self) -> float:
        """Height of the walls in section, m: to the eave, or to the highest level without one."""
        eave = self.eave.si if self.eave else max([0.0, *(level.z.si for level in self.levels)])
        return eave + self.roof.raised

    def pressures(self) -> list[tuple[Shown, str]]:
        """Return every pressure there is with the words for where it acts."""
        placed: list[tuple[Value, str]] = [
            (level.value, f"windward wall at {level.key}") for level in self.levels
        ]
        placed += self.elsewhere()
        return [(value, where) for value, where in placed if isinstance(value, Shown)]

    def elsewhere(self) -> list[tuple[Value, str]]:
        """Return what acts on everything but the windward wall, missing values and all."""
        surfaces: tuple[Pressure, ...] = (*self.leeward, *self.side, *self.internal)
        placed = [(one.value, one.surface) for one in surfaces]
        for zone in self.zones:
            for number, value in enumerate(zone.values, start=1):
                which = f", alternative {number}" if len(zone.values) > 1 else ""
                placed.append((value, f"roof {zone.label}{which}"))
        return placed


def sense(pressure: float) -> str:
    """Return which way a pressure acts on the surface, by the sign convention."""
    return "toward" if pressure > 0.0 else "away"


def gather(statement: lookup.Record, uses: Mapping[str, Any]) -> Wind:
    """Look up everything there is; a value that cannot be shown becomes a note."""
    notes: list[str] = []
    levels = _levels(statement, uses, notes)
    depth = _length(statement, uses, "depth", "depth along the wind", notes)
    eave = _length(statement, uses, "h_eave", "eave height", notes)
    roof = _roof(statement, uses, depth, notes)
    sides = (
        ("p_leeward", "leeward wall"),
        ("p_side", "side walls"),
        ("p_internal", "inside"),
    )
    leeward, side, internal = (_scalars(statement, uses, *one, notes) for one in sides)
    if "p_internal_both" in uses:
        (one,) = _scalars(
            statement, {"p": uses["p_internal_both"]}, "p", "inside, both signs", notes
        )
        internal = (*internal, Pressure(one.surface, one.value, both=True))
    zones = _zones(statement, uses, depth, notes) if roof.rise is not None else ()
    return Wind(levels, leeward, side, internal, zones, depth, eave, roof, tuple(notes))


def _levels(
    statement: lookup.Record, uses: Mapping[str, Any], notes: list[str]
) -> tuple[Level, ...]:
    keys = lookup.rows(statement, uses["levels"])
    if isinstance(keys, Missing):
        notes.append(f"Windward wall not drawn: {keys.why}.")
        return ()
    heights = lookup.cells(statement, uses["levels"], uses["z"])
    pressures = lookup.cells(statement, uses["levels"], uses["p_windward"])
    levels = []
    for key, z, value in zip(keys, heights, pressures, strict=True):
        if isinstance(z, Missing):
            notes.append(f"Row '{key}' not drawn: {z.why}.")
            continue
        levels.append(Level(key, z, value))
        if isinstance(value, Missing):
            notes.append(f"No windward pressure at {key}: {value.why}.")
        elif z.si < 0.0:
            notes.append(f"{key} is below the ground: no arrow is drawn there.")
    return tuple(sorted(levels, key=lambda level: level.z.si))


def _length(
    statement: lookup.Record, uses: Mapping[str, Any], role: str, words: str, notes: list[str]
) -> Shown | None:
    if role not in uses:
        return None
    found = lookup.quantity(statement, uses[role])
    if isinstance(found, Shown) and found.si > 0.0:
        return found
    why = found.why if isinstance(found, Missing) else f"{found.label} is not a length to draw"
    notes.append(f"The {words} is not to scale: {why}.")
    return None


def _roof(
    statement: lookup.Record, uses: Mapping[str, Any], depth: Shown | None, notes: list[str]
) -> Roof:
    """Return the roof as it shows in this section; what speaks against drawing it is noted."""
    if "roof_shape" in uses and lookup.option(statement, uses["roof_shape"]) == "flat":
        return Roof()
    if "theta" not in uses:
        return Roof()
    pitch = lookup.quantity(statement, uses["theta"])
    if isinstance(pitch, Missing):
        notes.append(f"Roof not drawn: the pitch is not known, {pitch.why}.")
        return Roof(rise=None)
    rise = lookup.quantity(statement, uses["rise"]) if "rise" in uses else None
    if pitch.si and _ridge_along(statement, uses):
        return _ridged(pitch, rise, notes)
    why = _not_a_gable(pitch, rise, depth)
    if why:
        notes.append(f"Roof not drawn: {why}.")
        return Roof(pitch, None)
    return Roof(pitch, depth.si / 2.0 * math.tan(pitch.si) if depth else 0.0)


def _ridge_along(statement: lookup.Record, uses: Mapping[str, Any]) -> bool:
    """Tell whether the ridge's direction is the wind's; both must be named to tell."""
    if "ridge" not in uses or "along" not in uses:
        return False
    return lookup.option(statement, uses["ridge"]) == str(uses["along"])


def _ridged(pitch: Shown, rise: Value | None, notes: list[str]) -> Roof:
    """Return a roof seen along its ridge."""
    notes.append("The ridge runs along the wind.")
    if isinstance(rise, Shown) and rise.si >= 0.0:
        return Roof(pitch, raised=rise.si)
    notes.append("The roof above the eaves is not drawn: its rise is not known.")
    return Roof(pitch)


def _not_a_gable(pitch: Shown, rise: Value | None, depth: Shown | None) -> str:
    """Return what speaks against two slopes of this pitch over this depth, or nothing."""
    if not 0.0 <= pitch.si <= _STEEPEST:
        return f"a pitch of {pitch.label} is no roof to draw"
    if pitch.si > 0.0 and depth is None:
        return "the depth along the wind is not known"
    expected = depth.si / 2.0 * math.tan(pitch.si) if depth else 0.0
    if isinstance(rise, Shown) and not math.isclose(rise.si, expected, rel_tol=0.01, abs_tol=1e-3):
        return f"a rise of {rise.label} is not that of {pitch.label} across this depth"
    return ""


def _scalars(
    statement: lookup.Record, uses: Mapping[str, Any], role: str, surface: str, notes: list[str]
) -> tuple[Pressure, ...]:
    named = lookup.numbered(uses, role)
    found = []
    for number, name in enumerate(named, start=1):
        words = f"{surface} {number}" if len(named) > 1 else surface
        value = lookup.quantity(statement, name)
        found.append(Pressure(words, value))
        if isinstance(value, Missing):
            notes.append(f"{words.capitalize()} not drawn: {value.why}.")
    return tuple(found)


def _zones(
    statement: lookup.Record, uses: Mapping[str, Any], depth: Shown | None, notes: list[str]
) -> tuple[Zone, ...]:
    """Return the roof's zones: those of a schedule, those of a mapping, or the two slopes."""
    zones = uses.get("roof_zones")
    if isinstance(zones, Mapping):
        by_label = {
            str(label): [names] if isinstance(names, str) else list(names)
            for label, names in zones.items()
        }
        return _even(statement, by_label, notes)
    if zones is not None:
        return _scheduled(statement, uses, depth, notes)
    slopes = (
        ("roof_windward", "windward slope", 0.0, 0.5),
        ("roof_leeward", "leeward slope", 0.5, 1.0),
    )
    found = (
        Zone(label, begin, end, _values(statement, named))
        for role, label, begin, end in slopes
        if (named := lookup.numbered(uses, role))
    )
    return _noted(tuple(found), notes)


def _values(statement: lookup.Record, named: list[str]) -> tuple[Value, ...]:
    return tuple(lookup.quantity(statement, name) for name in named)


def _even(
    statement: lookup.Record,
    labelled: Mapping[str, list[str]],
    notes: list[str],
) -> tuple[Zone, ...]:
    """Return zones of equal length from the windward edge on, and say so."""
    if labelled:
        notes.append("Lengths of the roof zones are not to scale.")
    share = 1.0 / max(1, len(labelled))
    zones = (
        Zone(label, share * place, share * (place + 1), _values(statement, named))
        for place, (label, named) in enumerate(labelled.items())
    )
    return _noted(tuple(zones), notes)


def _scheduled(
    statement: lookup.Record, uses: Mapping[str, Any], depth: Shown | None, notes: list[str]
) -> tuple[Zone, ...]:
    """Return the zones of a schedule, by start and end or one width after the other."""
    schedule = uses["roof_zones"]
    keys = lookup.rows(statement, schedule)
    if isinstance(keys, Missing):
        notes.append(f"Roof pressures not drawn: {keys.why}.")
        return ()
    columns = [lookup.cells(statement, schedule, one) for one in lookup.numbered(uses, "zone_p")]
    rows = list(zip(*columns, strict=True)) or [()] * len(keys)
    limits = _limits(statement, uses, depth)
    if limits is None:
        notes.append("Lengths of the roof zones are not to scale.")
        limits = [(place / len(keys), (place + 1) / len(keys)) for place in range(len(keys))]
    title = lookup.heading(statement, schedule)
    zones = []
    for key, (begin, end), row in zip(keys, limits, rows, strict=True):
        label = f"{title} {key}" if title and key.isdigit() else key
        if begin < min(1.0, end):
            zones.append(Zone(label, begin, min(1.0, end), row))
        else:
            notes.append(f"Roof, {label}: it has no length on this roof.")
    return _noted(tuple(zones), notes)


def _limits(
    statement: lookup.Record, uses: Mapping[str, Any], depth: Shown | None
) -> list[tuple[float, float]] | None:
    """Return where each zone starts and ends as shares of the depth, or None when not known."""
    if depth is None:
        return None
    columns = [
        lookup.cells(statement, uses["roof_zones"], uses.get(role, ""))
        for role in ("zone_start", "zone_end", "zone_width")
    ]
    starts, ends, widths = (
        [one.si / depth.si for one in cells if isinstance(one, Shown) and one.si >= 0.0]
        for cells in columns
    )
    count = len(columns[0])
    if len(starts) == len(ends) == count:
        return list(zip(starts, ends, strict=True))
    if len(widths) < count or not math.isclose(sum(widths), 1.0, rel_tol=0.005):
        return None
    # Rounding of the printed widths must not leave the last zone short of the leeward edge.
    passed = [end / sum(widths) for end in accumulate(widths)]
    return list(zip([0.0, *passed], passed, strict=False))


def _noted(zones: tuple[Zone, ...], notes: list[str]) -> tuple[Zone, ...]:
    for zone in zones:
        for number, value in enumerate(zone.values, start=1):
            if isinstance(value, Missing):
                which = f", alternative {number}," if len(zone.values) > 1 else ""
                notes.append(f"Roof {zone.label}{which} not drawn: {value.why}.")
    return zones
