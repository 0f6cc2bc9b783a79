"""Wind on a box with a flat or gable roof, by forces on its faces: a second way, with numpy only.

Every face of the building is a facet with an area, an outward normal and a centroid. A pressure
toward the surface is a force against the normal; forces and moments are summed as vectors. The
pressures follow the directional procedure (ASCE 7-16 chapters 26 and 27, NSCP 2015 207A and 207B)
with coefficients read from the files of references, not from the package.
"""

from __future__ import annotations

import csv
import itertools
import math
from dataclasses import dataclass, field
from pathlib import Path

import numpy as np

REFERENCES = Path(__file__).parents[1] / "references"
TERRAIN = {"B": (7.0, 365.76), "C": (9.5, 274.32), "D": (11.5, 213.36)}
FOOT, PSF, MPH = 0.3048, 47.880258980336, 0.44704
G, K_D, C_WINDWARD = 0.85, 0.85, 0.8
UP = np.array([0.0, 0.0, 1.0])
ALONG = np.array([1.0, 0.0, 0.0])


def read(name: str) -> list[dict[str, str]]:
    """Return the rows of a file of references."""
    with (REFERENCES / f"{name}.csv").open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


@dataclass(frozen=True)
class Building:
    """What is known of a building, in metres, radians and m/s; levels from the highest down."""

    length: tuple[float, float] = (18.6, 12.6)
    levels: tuple[float, ...] = (7.2, 3.6, 0.0)
    roof: str = "flat"
    ridge: str = "X"
    theta: float = 0.0
    speed: float = 70.0
    exposure: str = "C"
    internal: float = 0.18
    ground: float = 0.0
    code: str = "NSCP 2015"
    units: str = "SI"

    @property
    def eaves(self) -> float:
        """The height of the eaves."""
        return max(self.levels)

    @property
    def rise(self) -> float:
        """The rise of the roof: half its width by the slope."""
        if self.roof == "flat":
            return 0.0
        return self.length[1 if self.ridge == "X" else 0] / 2 * math.tan(self.theta)

    @property
    def mean_height(self) -> float:
        """The mean height of the roof; that of the eaves up to 10 degrees (26.2)."""
        return self.eaves + (self.rise / 2 if self.theta > math.radians(10) else 0.0)

    def sets(self) -> dict[str, str]:
        """Return the entries of the wind workbook for this building."""
        metres = {"L_x": self.length[0], "L_y": self.length[1], "r_r": self.rise}
        metres |= {"h": self.mean_height, "h_e": self.eaves}
        given = {name: f"{value!r} m" for name, value in metres.items()}
        given |= {"V": f"{self.speed!r} m/s", "theta": f"{self.theta!r} rad"}
        given |= {"roof": self.roof, "exposure": self.exposure}
        given["enclosure"] = "enclosed" if self.internal == 0.18 else "partially enclosed"
        if self.roof == "gable":
            given["ridge"] = self.ridge
        if self.code == "ASCE 7-16":
            given["z_e"] = f"{self.ground!r} m"
        return given

    def velocity_pressure(self, z: float) -> float:
        """Return q_z in Pa (26.10.2), with the constant of the unit system."""
        alpha, gradient = TERRAIN[self.exposure]
        least = 15 * FOOT
        if self.units == "SI":
            least = 4.5 if self.code == "NSCP 2015" else 4.6
        factor = 2.01 * (max(z, least) / gradient) ** (2 / alpha) * K_D
        if self.code == "ASCE 7-16":
            rate = 0.000119 if self.units == "SI" else 0.0000362 / FOOT
            factor *= math.exp(-rate * self.ground)
        if self.units == "SI":
            return float(0.613 * factor * self.speed**2)
        return float(0.00256 * factor * (self.speed / MPH) ** 2 * PSF)


@dataclass
class Facet:
    """A face or a part of one: area in m2, outward normal, centroid, external C_p times q."""

    area: float
    normal: np.ndarray
    centre: np.ndarray
    pressure: float


@dataclass
class Wind:
    """The facets of a building in wind along one of its axes; x runs with the wind."""

    building: Building
    direction: str
    alternative: int
    walls: list[Facet] = field(default_factory=list)
    slopes: list[Facet] = field(default_factory=list)

    def __post_init__(self) -> None:
        """Find the pressures and set up the facets."""
        lengths = self.building.length
        self.depth, self.breadth = lengths if self.direction == "X" else lengths[::-1]
        self.gable = self.building.roof == "gable"
        self.across = self.gable and self.building.ridge != self.direction
        self.q_h = self.building.velocity_pressure(self.building.mean_height)
        self.p_i = self.building.internal * self.q_h
        self._raise_walls()
        if self.across and self.building.theta >= math.radians(10) - 1e-12:
            self._pitch_roof()
        else:
            self._zone_roof()

    # --- coefficients -----------------------------------------------------------------------

    def leeward_wall(self) -> float:
        """Return C_p of the leeward wall by L/B."""
        return float(np.interp(self.depth / self.breadth, [0, 1, 2, 4], [-0.5, -0.5, -0.3, -0.2]))

    def _slope(self, column: str, least: float, most: float) -> float:
        """Return a value of the windward slope from the listed pairs, clipped to one sign."""
        grid: dict[float, list[tuple[float, float]]] = {}
        for row in read("windward_roof"):
            value = min(max(float(row[column] or 0.0), least), most)
            grid.setdefault(float(row["h_over_L"]), []).append((float(row["theta_deg"]), value))
        angle = math.degrees(self.building.theta)
        at = []
        for line in grid.values():
            angles, values = zip(*sorted(line), strict=True)
            at.append(float(np.interp(angle, list(angles), list(values))))
        return float(np.interp(self.building.mean_height / self.depth, list(grid), at))

    def windward_slope(self) -> float:
        """Return C_p of the windward slope; of the second values a positive one comes first."""
        if self.alternative == 1:
            return self._slope("first", -9.0, 0.0)
        return self._slope("second", 0.0, 9.0) or self._slope("second", -9.0, 0.0)

    def leeward_slope(self) -> float:
        """Return C_p of the leeward slope by angle and h/L."""
        angle = math.degrees(self.building.theta)
        lines = [[-0.3, -0.5, -0.6], [-0.5, -0.5, -0.6], [-0.7, -0.6, -0.6]]
        at = [np.interp(angle, [10, 15, 20], line) for line in lines]
        return float(np.interp(self.building.mean_height / self.depth, [0.25, 0.5, 1.0], at))

    def zones(self) -> list[tuple[float, float, float]]:
        """Return (from, to, C_p) of the roof's zones from the windward edge."""
        h = self.building.mean_height
        ratio = h / self.depth
        squat, tall = [-0.9, -0.9, -0.5, -0.3], [-1.3, -0.7, -0.7, -0.7]
        if ratio >= 1.0:
            area = min(h / 2, self.depth) * self.breadth
            marks = [9.3, 23.2, 92.9]
            if self.building.units == "US":
                marks = [100 * FOOT**2, 250 * FOOT**2, 1000 * FOOT**2]
            tall[0] *= float(np.interp(area, marks, [1.0, 0.9, 0.8]))
        ends = [min(e, self.depth) for e in (0.0, h / 2, h, 2 * h, self.depth)]
        out = []
        for place, (low, high) in enumerate(itertools.pairwise(ends)):
            first = float(np.interp(ratio, [0.5, 1.0], [squat[place], tall[place]]))
            out.append((low, high, first if self.alternative == 1 else -0.18))
        return out

    # --- facets -----------------------------------------------------------------------------

    def _raise_walls(self) -> None:
        b, levels = self.building, sorted(max(z, 0.0) for z in self.building.levels)
        ends = [levels[0], *((u + v) / 2 for u, v in itertools.pairwise(levels)), levels[-1]]
        leeward = self.q_h * G * self.leeward_wall()
        for z, (low, high) in zip(levels, itertools.pairwise(ends), strict=True):
            area = (high - low) * self.breadth
            windward = b.velocity_pressure(z) * G * C_WINDWARD
            self.walls.append(Facet(area, -ALONG, np.array([0.0, 0.0, z]), windward))
            self.walls.append(Facet(area, ALONG, np.array([self.depth, 0.0, z]), leeward))
        if self.gable and not self.across:
            area, z = self.breadth * b.rise / 2, b.eaves + b.rise / 3
            windward = self.q_h * G * C_WINDWARD
            self.walls.append(Facet(area, -ALONG, np.array([0.0, 0.0, z]), windward))
            self.walls.append(Facet(area, ALONG, np.array([self.depth, 0.0, z]), leeward))

    def _pitch_roof(self) -> None:
        b = self.building
        sine, cosine = math.sin(b.theta), math.cos(b.theta)
        area = self.depth / 2 / cosine * self.breadth
        for side, c_p in ((-1.0, self.windward_slope()), (1.0, self.leeward_slope())):
            normal = side * sine * ALONG + cosine * UP
            centre = np.array([self.depth * (2 + side) / 4, 0.0, b.eaves + b.rise / 2])
            self.slopes.append(Facet(area, normal, centre, self.q_h * G * c_p))

    def _zone_roof(self) -> None:
        # In plan only: what is left of the horizontal part acts against the wind or is none.
        for low, high, c_p in self.zones():
            centre = np.array([(low + high) / 2, 0.0, self.building.eaves])
            area = (high - low) * self.breadth
            self.slopes.append(Facet(area, UP, centre, self.q_h * G * c_p))

    # --- sums -------------------------------------------------------------------------------

    def force(self, facets: list[Facet], internal: int = 0) -> np.ndarray:
        """Return the sum of the forces on facets; internal pressure pushes outward."""
        parts = [-(f.pressure - internal * self.p_i) * f.area * f.normal for f in facets]
        return np.asarray(np.sum(parts, axis=0))

    def turning(self, facets: list[Facet], *, level: bool) -> float:
        """Return the moment about mid-depth at the ground, of level or of vertical forces."""
        middle = np.array([self.depth / 2, 0.0, 0.0])
        total = 0.0
        for facet in facets:
            force = self.force([facet])
            force = np.array([force[0], 0.0, 0.0] if level else [0.0, 0.0, force[2]])
            total += float(np.cross(facet.centre - middle, force)[1])
        return total

    def roof_shear(self) -> float:
        """Return the roof's horizontal force; where it acts against the wind it is left out.

        Fig. 27.3-1, note: the shear is not less than with the wind on roof surfaces neglected.
        """
        return max(float(self.force(self.slopes)[0]), 0.0)

    def base_shear(self, internal: int = 0) -> float:
        """Return the force with the wind on the whole building."""
        return float(self.force(self.walls, internal)[0]) + self.roof_shear()

    def overturning(self) -> float:
        """Return the moment about mid-depth at the ground, positive with the wind."""
        roof = self.turning(self.slopes, level=True) if self.roof_shear() > 0.0 else 0.0
        return self.turning(self.walls, level=True) + roof + self.turning(self.slopes, level=False)

    def vertical(self, internal: int) -> float:
        """Return the force on the roof, downward positive."""
        return -float(self.force(self.slopes, internal)[2])

    def storeys(self) -> list[float]:
        """Return the force at each level from the highest down; the highest takes the roof."""
        levels = sorted((max(z, 0.0) for z in self.building.levels), reverse=True)
        at = dict.fromkeys(levels, 0.0)
        for facet in self.walls:
            z = min(float(facet.centre[2]), levels[0])
            at[z] += float(self.force([facet])[0])
        at[levels[0]] += self.roof_shear()
        return [at[z] for z in levels]

    def least(self) -> tuple[float, float]:
        """Return base shear and overturning of the least design wind (27.1.5)."""
        b = self.building
        wall, roof = (16 * PSF, 8 * PSF) if b.units == "US" else (770.0, 380.0)
        shear = moment = 0.0
        for facet in self.walls:
            if facet.normal[0] < 0.0:
                shear += wall * facet.area
                moment += wall * facet.area * float(facet.centre[2])
        if self.across:
            area = b.rise * self.breadth
            shear += roof * area
            moment += roof * area * (b.eaves + b.rise / 2)
        return shear, moment
