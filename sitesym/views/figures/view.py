"""Parallel projection of the cell onto the page, as crystal drawings have it: z up, y to the right, x to the viewer."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from sitesym.groups.operation import Floats

AZIMUTH = np.radians(24)
ELEVATION = np.radians(13)
_THICKEST = 0.5
_RIGHT = np.array([-np.sin(AZIMUTH), np.cos(AZIMUTH), 0.0])
TOWARD = np.array([np.cos(AZIMUTH) * np.cos(ELEVATION), np.sin(AZIMUTH) * np.cos(ELEVATION), np.sin(ELEVATION)])
"""Unit vector to the viewer in the Cartesian axes of the report."""
_UP = np.cross(TOWARD, _RIGHT)


@dataclass(frozen=True, slots=True)
class View:
    """Scale (units of the drawing per Å) and the origin of the page, which is the crystal's origin."""

    scale: float

    def flat(self, points: Floats) -> Floats:
        """(…, 2) places on the page, x to the right and y downwards, of points (…, 3) in Å."""
        return np.stack([points @ _RIGHT, -(points @ _UP)], axis=-1) * self.scale

    def place(self, point: Floats) -> tuple[float, float]:
        """Where one point (3,) in Å stands on the page."""
        x, y = self.flat(point)
        return float(x), float(y)

    def depth(self, points: Floats) -> Floats:
        """(…,) distance in Å towards the viewer."""
        return np.asarray(points @ TOWARD)


def fitted(points: Floats, width: float, height: float, largest: float) -> View:
    """The view in which points (n, 3) fill a page of this size; never more than `largest` units per Å."""
    extent = np.ptp(View(1.0).flat(points), axis=0)
    return View(float(min(width / max(extent[0], 1e-6), height / max(extent[1], 1e-6), largest)))


@dataclass(frozen=True, slots=True)
class Stroke:
    """A piece of the drawing that hides what lies behind it; `depth` in Å towards the viewer."""

    depth: float
    svg: str


@dataclass(frozen=True, slots=True)
class Fog:
    """What is far away looks paler: depth in Å at which nothing and at which the most is veiled."""

    near: float
    far: float

    @classmethod
    def over(cls, depths: Floats) -> Fog:
        """Fog that begins at the nearest and is thickest at the farthest of these depths."""
        return cls(float(depths.max()), float(min(depths.min(), depths.max() - 0.1)))

    def at(self, depth: float) -> float:
        """Share of the page's colour, from 0 to `_THICKEST`."""
        return round(_THICKEST * min(max((self.near - depth) / (self.near - self.far), 0.0), 1.0), 2)
