"""Directions from one frame to another, where a person says which: azimuth and elevation, or u and v, to θ and φ.

Boresight is the z axis, x points to the right and y up, θ counts from z and φ from x towards y, all in degrees:

- ``elevation over azimuth``: azimuth in the horizontal plane, elevation up from it;
  x = cos el · sin az, y = sin el, z = cos el · cos az, so that sin el = sin θ · sin φ and tan az = tan θ · cos φ
- ``azimuth over elevation``: elevation in the vertical plane, azimuth off it;
  x = sin az, y = cos az · sin el, z = cos az · cos el
- ``u/v``: direction cosines, u = sin θ · cos φ, v = sin θ · sin φ; the half space z ≥ 0 only

Common practice, no source; which of the two orders a file means depends on its positioner, and some files count azimuth
or elevation the other way round ("reversed"). So nothing is converted that nobody asked for.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from specflow.errors import ConditionsError

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Frame:
    """A frame: the names of its two dimensions, what it does in words, and its way to unit vectors (n, 3)."""

    first: str
    second: str
    words: str
    vectors: Callable[[Floats, Floats], Floats]


def theta_phi(frame: str, first: Floats, second: Floats) -> tuple[Floats, Floats]:
    """Return θ in 0..180° and φ in -180..180° of directions in a frame of ``FRAMES``; NaN where one is unstated.

    ConditionsError where u² + v² is above 1: such a direction does not exist.
    """
    across = FRAMES[frame].vectors(np.asarray(first, float), np.asarray(second, float))
    theta = np.degrees(np.arctan2(np.hypot(across[:, 0], across[:, 1]), across[:, 2]))
    return theta, np.degrees(np.arctan2(across[:, 1], across[:, 0]))


def frame_of(text: str) -> tuple[str, float, float] | None:
    """Read what a person says: the frame, and the signs of its two angles; None where it is none that is known.

    "elevation over azimuth", "azimuth over elevation, azimuth reversed", "u/v".
    """
    plain = " ".join(text.casefold().replace("-", " ").replace("_", " ").split())
    name, *more = (part.strip() for part in plain.split(","))
    known = next((frame for frame in FRAMES if frame == name), None)
    if known is None:
        return None
    signs = {FRAMES[known].first: 1.0, FRAMES[known].second: 1.0}
    for part in more:
        axis = part.removesuffix(" reversed")
        if axis == part or axis not in signs:
            return None
        signs[axis] = -1.0
    return known, signs[FRAMES[known].first], signs[FRAMES[known].second]


def _elevation_over_azimuth(azimuth: Floats, elevation: Floats) -> Floats:
    az, el = np.radians(azimuth), np.radians(elevation)
    return np.stack([np.cos(el) * np.sin(az), np.sin(el), np.cos(el) * np.cos(az)], axis=-1)


def _azimuth_over_elevation(azimuth: Floats, elevation: Floats) -> Floats:
    az, el = np.radians(azimuth), np.radians(elevation)
    return np.stack([np.sin(az), np.cos(az) * np.sin(el), np.cos(az) * np.cos(el)], axis=-1)


def _cosines(u: Floats, v: Floats) -> Floats:
    rest = 1.0 - u**2 - v**2
    if (rest < -1e-9).any():
        place = int(np.flatnonzero(rest < -1e-9)[0])
        raise ConditionsError(
            f"u = {u[place]:g}, v = {v[place]:g} is no direction: u² + v² is above 1",
            hint="u and v are direction cosines; angles in degrees have other names",
        )
    return np.stack([u, v, np.sqrt(np.maximum(rest, 0.0))], axis=-1)


FRAMES: Mapping[str, Frame] = {
    "elevation over azimuth": Frame(
        "azimuth",
        "elevation",
        "sin el = sin θ · sin φ, tan az = tan θ · cos φ",
        _elevation_over_azimuth,
    ),
    "azimuth over elevation": Frame(
        "azimuth",
        "elevation",
        "sin az = sin θ · cos φ, tan el = tan θ · sin φ",
        _azimuth_over_elevation,
    ),
    "u/v": Frame("direction_u", "direction_v", "u = sin θ · cos φ, v = sin θ · sin φ, z ≥ 0", _cosines),
}
