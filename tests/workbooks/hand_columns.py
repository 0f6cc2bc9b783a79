"""A column accumulated by hand: plain numbers, level by level, nothing of the package in it."""

from __future__ import annotations

import math
from dataclasses import dataclass

HEAVY = 4.8  # kPa
AREA_LIMIT = {"NSCP 2015": 40.0, "ASCE 7-16": 37.16}


@dataclass(frozen=True)
class Floor:
    """One level: m, m2, kPa and kN; ``pool`` is 'yes', 'heavy', 'garage', 'assembly' or 'roof'."""

    area: float
    dead: float
    least: float
    live: float
    pool: str
    own: float
    on_grade: bool = False
    use: str = ""


@dataclass(frozen=True)
class Force:
    """What a column carries below a level, kN."""

    D: float
    D_min: float
    L0: float
    L: float
    L1: float
    Lr: float


def pool_of(floor: Floor) -> str:
    """Return the pool a floor's load belongs to; a reducible one over the limit is heavy."""
    return "heavy" if floor.pool == "yes" and floor.live > HEAVY else floor.pool


def factor(floor: Floor) -> float:
    """Return f_1: 1 for assembly, garages and heavy loads, a half elsewhere."""
    return 1.0 if floor.pool in ("assembly", "garage") or floor.live > HEAVY else 0.5


def reduction(code: str, area: float, floors: int, k: float) -> float:
    """Return the reduction by area for floors of one pool."""
    if k * area < AREA_LIMIT[code]:
        return 1.0
    return max(0.4 if floors >= 2 else 0.5, 0.25 + 4.57 / math.sqrt(k * area))


def pooled(code: str, pool: str, carried: list[Floor], k: float, *, parking: bool) -> float:
    """Return the reduction factor of a pool."""
    area, count = sum(f.area for f in carried), len(carried)
    if pool == "yes":
        return reduction(code, area, count, k)
    if pool == "heavy":
        return 0.8 if count >= 2 and code == "ASCE 7-16" else 1.0
    if pool == "garage" and parking:
        if code == "ASCE 7-16":
            return 0.8 if count >= 2 else 1.0
        return 1.0 if k * area < 40.0 else max(0.6, 0.25 + 4.57 / math.sqrt(k * area))
    return 1.0


def stored(code: str, floor: Floor) -> float:
    """Return what NSCP leaves of a storage load on a column, 1 for any other load or code."""
    storage = floor.use.startswith("storage") and floor.live > HEAVY
    return 0.8 if storage and code == "NSCP 2015" else 1.0


def accumulate(
    code: str, floors: list[Floor], *, roof: float, k: float = 4.0, parking: bool = False
) -> list[Force]:
    """Return the forces below each level; ``roof`` is the roof live load in kPa."""
    found = []
    for end in range(1, len(floors) + 1):
        down = [f for f in floors[:end] if not f.on_grade]
        own = sum(f.own for n, f in enumerate(floors[:end]) if any(
            not g.on_grade for g in floors[: n + 1]
        ))  # fmt: skip
        live = live_1 = live_0 = 0.0
        for pool in ("yes", "heavy", "garage", "assembly"):
            part = [f for f in down if pool_of(f) == pool]
            r = pooled(code, pool, part, k, parking=parking) if part else 1.0
            live_0 += sum(f.live * f.area for f in part)
            live += sum(r * stored(code, f) * f.live * f.area for f in part)
            live_1 += sum(r * stored(code, f) * factor(f) * f.live * f.area for f in part)
        found.append(
            Force(
                D=sum(f.dead * f.area for f in down) + own,
                D_min=sum(f.least * f.area for f in down) + own,
                L0=live_0,
                L=live,
                L1=live_1,
                Lr=sum(roof * f.area for f in down if f.pool == "roof"),
            )
        )
    return found
