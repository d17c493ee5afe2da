"""Where refraction at the surface matters: the cone of an objective, and beams that do not pass a face straight.

Snell's law with one index for the crystal: sin(outside) = index · sin(inside). A beam along the normal is not bent.
"""

from __future__ import annotations

import numpy as np

from sitesym.geometry.notation import Geometry

_STRAIGHT = 0.5
"""Degrees off the normal below which a beam counts as straight."""


def cone_words(aperture: float, index: float) -> str:
    """Half angles of an objective's cone outside and inside the crystal, as a plain clause; "" without an aperture."""
    if not aperture:
        return ""
    inside = np.degrees(np.arcsin(aperture / index))
    if aperture > 1:
        return (
            f"an objective of aperture {aperture:g} (immersion) fills a cone of {inside:.0f}° half angle in the crystal"
        )
    outside = np.degrees(np.arcsin(aperture))
    return (
        f"an objective of aperture {aperture:g} fills a cone of {outside:.0f}° half angle outside, {inside:.0f}° inside"
    )


def beam_words(geometry: Geometry, index: float) -> str:
    """What refraction does where the beams are neither on one line nor at 90°, as a plain clause; "" where they are.

    The laser is taken to enter straight, the scattered light to leave by a face along or across that one.
    """
    cosine = abs(float(geometry.incident.vector @ geometry.scattered.vector))
    between = float(np.degrees(np.arccos(min(cosine, 1.0))))
    off = min(between, 90 - between)
    if off < _STRAIGHT:
        return ""
    start = (
        f"the beams enclose {between:.0f}° inside the crystal: if the laser enters straight, light scattered along "
        f"{geometry.scattered.name} meets the nearest face along or across that one {off:.0f}° off its normal and "
    )
    sine = index * np.sin(np.radians(off))
    if sine >= 1:
        return f"{start}does not leave it (total reflection at an index of {index:g}): polish a face across it"
    outside = np.degrees(np.arcsin(sine))
    mend = "set the collection there, or polish a face across it"
    return f"{start}leaves at {outside:.0f}° outside (index {index:g}): {mend}"
