"""Colours, line styles and type sizes: two themes, light and dark, shared by plots and window.

Colours are "#rrggbb" texts; widths, dashes and sizes are in points. No two roles look alike without colour: each
has its own triple of width, dash and marker.

References
----------
[1] W3C, Web Content Accessibility Guidelines 2.2, "relative luminance" and "contrast ratio".
[2] CIE 15:2004, Colorimetry, CIELAB; sRGB after IEC 61966-2-1 with white D65 (matrix values from memory).
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from app.figures.picture import Role

Rgba = NDArray[np.uint8]
Lab = tuple[float, float, float]

_RGB_TO_XYZ = np.array([[0.4124, 0.3576, 0.1805], [0.2126, 0.7152, 0.0722], [0.0193, 0.1192, 0.9505]])
_WHITE = _RGB_TO_XYZ.sum(axis=1)
_MAP_ROLES = frozenset(
    {
        Role.THRESHOLD,
        Role.THRESHOLD_SHIFTED,
        Role.THRESHOLD_OF_MODEL,
        Role.DECADE,
        Role.FRACTION,
        Role.CLOUD,
        Role.UNCERTAINTY,
        Role.TRACK,
    }
)


@dataclass(frozen=True, kw_only=True)
class LineStyle:
    """How a role is drawn. `dash` alternates ink and gap lengths [pt], empty for a solid line; `marker` is
    Matplotlib's code of a marker, empty for none, drawn as an outline where it is `hollow`."""

    colour: str
    width: float
    dash: tuple[float, ...] = ()
    marker: str = ""
    hollow: bool = False


@dataclass(frozen=True, kw_only=True, eq=False)
class Theme:
    """All that a plot or window needs to know about its looks.

    `window` lies behind panels, `base` behind fields, `background` behind curves. The colour scale runs from
    `far_below` to `threshold` and on to `far_above` (CIELAB), in a straight line each, so that equal steps look equal.
    """

    name: str
    window: str
    base: str
    text: str
    muted: str
    accent: str
    warning: str
    error: str
    good: str
    border: str
    background: str
    foreground: str
    grid: str
    halo: str
    far_below: Lab
    threshold: Lab
    far_above: Lab
    lines: Mapping[Role, LineStyle]
    small_size: float = 8.5
    font_size: float = 9.5
    title_size: float = 10.5

    def needs_halo(self, role: Role) -> bool:
        """Whether a line of this role wants a rim where it lies on a colour field."""
        return role not in _MAP_ROLES


def relative_luminance(colour: str) -> float:
    """Relative luminance of a "#rrggbb" colour, 0 for black and 1 for white [1]."""
    return float(_RGB_TO_XYZ[1] @ _linear(_channels(colour)))


def contrast(one: str, other: str) -> float:
    """Contrast ratio of two colours, 1 to 21 [1]."""
    low, high = sorted((relative_luminance(one), relative_luminance(other)))
    return (high + 0.05) / (low + 0.05)


@lru_cache(maxsize=32)
def colour_scale(theme: Theme, split: float) -> Rgba:
    """256 RGBA rows for places 0 to 1: below `split` one family of colours, above it the other; both meet in the
    colour of the threshold. The returned array is shared and read-only."""
    if not 0.0 <= split <= 1.0:
        raise ValueError(f"the split of a colour scale must lie between 0 and 1, got {split:g}")
    place = np.linspace(0.0, 1.0, 256)
    below = (split - place) / split if split > 0.0 else np.zeros(256)
    above = (place - split) / (1.0 - split) if split < 1.0 else np.zeros(256)
    joint, low, high = (np.array(lab) for lab in (theme.threshold, theme.far_below, theme.far_above))
    lab = joint + np.clip(below, 0.0, 1.0)[:, np.newaxis] * (low - joint)
    lab += np.clip(above, 0.0, 1.0)[:, np.newaxis] * (high - joint)
    scale = np.full((256, 4), 255, dtype=np.uint8)
    scale[:, :3] = np.rint(255.0 * _rgb_of_lab(lab))
    scale.setflags(write=False)
    return scale


def _channels(colour: str) -> NDArray[np.float64]:
    return np.array([int(colour[i : i + 2], 16) for i in (1, 3, 5)]) / 255.0


def _linear(channels: NDArray[np.float64]) -> NDArray[np.float64]:
    return np.where(channels <= 0.04045, channels / 12.92, ((channels + 0.055) / 1.055) ** 2.4)


def _rgb_of_lab(lab: NDArray[np.float64]) -> NDArray[np.float64]:
    """sRGB channels 0 to 1 of CIELAB colours [2], cut to the gamut."""
    lightness, a, b = np.moveaxis(lab, -1, 0)
    fy = (lightness + 16.0) / 116.0
    f = np.stack([fy + a / 500.0, fy, fy - b / 200.0], axis=-1)
    xyz = _WHITE * np.where(f > 6.0 / 29.0, f**3, 3.0 * (6.0 / 29.0) ** 2 * (f - 4.0 / 29.0))
    linear = np.clip(xyz @ np.linalg.inv(_RGB_TO_XYZ).T, 0.0, 1.0)
    encoded: NDArray[np.float64] = np.where(linear <= 0.0031308, 12.92 * linear, 1.055 * linear ** (1.0 / 2.4) - 0.055)
    return encoded


def _lines(
    *, ink: str, quiet: str, blue: str, orange: str, green: str, purple: str, cloud: str
) -> dict[Role, LineStyle]:
    return {
        Role.TOTAL: LineStyle(colour=ink, width=2.0),
        Role.THERMAL: LineStyle(colour=orange, width=1.6, dash=(7.0, 2.0)),
        Role.CONDENSATE: LineStyle(colour=blue, width=1.6, dash=(7.0, 1.8, 1.5, 1.8)),
        Role.CLASSICAL: LineStyle(colour=quiet, width=1.3, dash=(3.0, 2.4)),
        Role.THRESHOLD: LineStyle(colour=ink, width=1.9),
        Role.THRESHOLD_SHIFTED: LineStyle(colour=ink, width=1.5, dash=(5.0, 2.2)),
        Role.THRESHOLD_OF_MODEL: LineStyle(colour=blue, width=1.7, dash=(6.0, 1.6, 1.4, 1.6)),
        Role.DECADE: LineStyle(colour=ink, width=0.6),
        Role.FRACTION: LineStyle(colour=ink, width=1.1, dash=(1.2, 2.0)),
        Role.FIRST: LineStyle(colour=blue, width=1.8),
        Role.SECOND: LineStyle(colour=orange, width=1.8, dash=(6.0, 2.2)),
        Role.THIRD: LineStyle(colour=green, width=1.8, dash=(8.0, 2.0, 1.6, 2.0)),
        Role.FOURTH: LineStyle(colour=purple, width=1.8, dash=(1.6, 1.8)),
        Role.CLOUD: LineStyle(colour=cloud, width=1.4, dash=(9.0, 3.0), marker="o"),
        Role.UNCERTAINTY: LineStyle(colour=cloud, width=1.2),
        Role.STAGE: LineStyle(colour=quiet, width=0.7, dash=(1.0, 2.5)),
        Role.CURSOR: LineStyle(colour=cloud, width=0.9),
        Role.REFERENCE: LineStyle(colour=quiet, width=1.0),
        Role.REST: LineStyle(colour=purple, width=1.5, dash=(4.0, 2.0)),
        Role.TRACK: LineStyle(colour=cloud, width=1.7, marker="s"),
        Role.MEASURED: LineStyle(colour=orange, width=1.1, marker="D"),
        Role.SEEN: LineStyle(colour=blue, width=1.0, marker="o"),
        Role.COMPUTED: LineStyle(colour=blue, width=1.0, marker="s"),
        Role.RECALLED: LineStyle(colour=blue, width=1.2, marker="o", hollow=True),
        Role.ASSUMED: LineStyle(colour=orange, width=1.2, marker="D", hollow=True),
    }


LIGHT = Theme(
    name="light",
    window="#f3f3f0",
    base="#ffffff",
    text="#20252b",
    muted="#575e67",
    accent="#0b6370",
    warning="#8a5a00",
    error="#b3261e",
    good="#2a6b3c",
    border="#c9cbc8",
    background="#ffffff",
    foreground="#20252b",
    grid="#e7e8e6",
    halo="#ffffff",
    far_below=(67.0, -7.0, -26.0),
    threshold=(97.5, -0.5, 2.0),
    far_above=(72.0, 18.0, 40.0),
    lines=_lines(
        ink="#20252b",
        quiet="#6b727c",
        blue="#2363bd",
        orange="#b24a14",
        green="#0d7557",
        purple="#6b2c74",
        cloud="#990653",
    ),
)

DARK = Theme(
    name="dark",
    window="#1e2226",
    base="#15181b",
    text="#e6e8ea",
    muted="#a2a9b2",
    accent="#62c3cf",
    warning="#e3b04b",
    error="#ff8f85",
    good="#7fc894",
    border="#434a52",
    background="#15181b",
    foreground="#e6e8ea",
    grid="#2b3036",
    halo="#15181b",
    far_below=(45.0, -4.0, -32.0),
    threshold=(12.0, 0.0, -1.0),
    far_above=(45.0, 20.0, 34.0),
    lines=_lines(
        ink="#eceef0",
        quiet="#9aa2ac",
        blue="#6aa6fb",
        orange="#f2a065",
        green="#63d1a8",
        purple="#ecc4f4",
        cloud="#ffb3cf",
    ),
)

THEMES: Mapping[str, Theme] = {theme.name: theme for theme in (LIGHT, DARK)}
