"""Themes: contrast, evenness, and looks that do not rest on colour alone.

[1] W3C, Web Content Accessibility Guidelines 2.2, success criteria 1.4.3 (text 4.5:1), 1.4.11 (graphics 3:1), 1.4.1.
[2] B. Ottosson, "A perceptual color space for image processing" (2020): OKLab, matrices from memory.
[3] G. M. Machado, M. M. Oliveira and L. A. F. Fernandes, IEEE Trans. Vis. Comput. Graph. 15, 1291 (2009): matrices for
    full deuteranopia and protanopia, from memory.
"""

from __future__ import annotations

from itertools import combinations

import numpy as np
import pytest

from app.figures.picture import Role
from app.figures.theme import DARK, LIGHT, THEMES, Theme, colour_scale, contrast, relative_luminance

EITHER = pytest.mark.parametrize("theme", [LIGHT, DARK], ids=lambda theme: theme.name)
ON_FIELD = [Role.THRESHOLD, Role.THRESHOLD_SHIFTED, Role.DECADE, Role.FRACTION, Role.CLOUD, Role.UNCERTAINTY]

_TO_CONES = np.array(
    [
        [0.4122214708, 0.5363325363, 0.0514459929],
        [0.2119034982, 0.6806995451, 0.1073969566],
        [0.0883024619, 0.2817188376, 0.6299787005],
    ]
)
_TO_OKLAB = np.array(
    [
        [0.2104542553, 0.7936177850, -0.0040720468],
        [1.9779984951, -2.4285922050, 0.4505937099],
        [0.0259040371, 0.7827717662, -0.8086757660],
    ]
)
DEUTERANOPIA = np.array(
    [[0.367322, 0.860646, -0.227968], [0.280085, 0.672501, 0.047413], [-0.011820, 0.042940, 0.968881]]
)
PROTANOPIA = np.array(
    [[0.152286, 1.052583, -0.204868], [0.114503, 0.786281, 0.099216], [-0.003882, -0.048116, 1.051998]]
)


def linear(rgb: np.ndarray) -> np.ndarray:
    rgb = rgb / 255.0
    return np.where(rgb <= 0.04045, rgb / 12.92, ((rgb + 0.055) / 1.055) ** 2.4)


def oklab(rgb: np.ndarray, seen_by: np.ndarray | None = None) -> np.ndarray:
    light = linear(rgb)
    if seen_by is not None:
        light = np.clip(light @ seen_by.T, 0.0, 1.0)
    return np.cbrt(light @ _TO_CONES.T) @ _TO_OKLAB.T


def rgb_of(colour: str) -> np.ndarray:
    return np.array(list(bytes.fromhex(colour[1:])), dtype=float)


def hexes(theme: Theme, split: float) -> list[str]:
    return ["#" + bytes(row[:3]).hex() for row in colour_scale(theme, split)]


def test_luminance_and_contrast_of_black_white_and_grey():
    assert contrast("#000000", "#ffffff") == pytest.approx(21.0, abs=1e-9)  # [1]
    assert relative_luminance("#808080") == pytest.approx(0.2158605, abs=1e-5)  # [1], by its formula
    assert contrast("#777777", "#ffffff") == pytest.approx(4.48, abs=0.005)  # the usual example that just fails 4.5


@EITHER
def test_window_texts_are_readable(theme):
    for colour in (theme.text, theme.muted, theme.accent, theme.warning, theme.error, theme.good):
        for ground in (theme.window, theme.base, theme.background):
            assert contrast(colour, ground) >= 4.5, (colour, ground)
    for colour in (theme.foreground, theme.muted):
        assert contrast(colour, theme.background) >= 4.5


@EITHER
@pytest.mark.parametrize("role", list(Role), ids=lambda role: role.name)
def test_every_role_stands_out_from_the_background(theme, role):
    assert contrast(theme.lines[role].colour, theme.background) >= 3.0


@EITHER
@pytest.mark.parametrize("role", ON_FIELD, ids=lambda role: role.name)
def test_lines_of_the_map_stand_out_from_every_colour_of_the_field(theme, role):
    assert not theme.needs_halo(role)
    assert min(contrast(theme.lines[role].colour, ground) for ground in hexes(theme, 0.6)) >= 3.0


@EITHER
def test_no_two_roles_differ_by_colour_alone(theme):
    for one, other in combinations(Role, 2):
        a, b = theme.lines[one], theme.lines[other]
        assert (a.width, a.dash, a.marker) != (b.width, b.dash, b.marker), (one, other)


@EITHER
@pytest.mark.parametrize("seen_by", [None, DEUTERANOPIA, PROTANOPIA], ids=["full", "deuteranopia", "protanopia"])
def test_curves_of_one_plot_differ_in_colour_for_all_eyes(theme, seen_by):
    families = [
        [Role.FIRST, Role.SECOND, Role.THIRD, Role.FOURTH],
        [Role.TOTAL, Role.THERMAL, Role.CONDENSATE],
        [Role.THRESHOLD, Role.CLOUD],
    ]
    for family in families:
        for one, other in combinations(family, 2):
            a, b = (oklab(rgb_of(theme.lines[role].colour), seen_by) for role in (one, other))
            assert np.linalg.norm(a - b) > 0.08, (one, other)


@EITHER
@pytest.mark.parametrize("split", [0.3, 0.62, 1.0])
def test_each_family_of_the_colour_scale_is_even_and_monotonic(theme, split):
    colours = oklab(colour_scale(theme, split)[:, :3].astype(float))
    joint = round(255 * split)
    for family in (colours[: joint + 1], colours[joint:]):
        if len(family) < 16:
            continue
        sample = family[np.linspace(0, len(family) - 1, 9).round().astype(int)]
        steps = np.linalg.norm(np.diff(sample, axis=0), axis=1)
        assert steps.max() / steps.min() < 1.6
        lightness = np.diff(sample[:, 0])
        assert np.all(lightness > 0.0) or np.all(lightness < 0.0)


@EITHER
@pytest.mark.parametrize("seen_by", [None, DEUTERANOPIA, PROTANOPIA], ids=["full", "deuteranopia", "protanopia"])
def test_both_sides_of_the_threshold_differ_for_all_eyes(theme, seen_by):
    colours = oklab(colour_scale(theme, 0.5)[:, :3].astype(float), seen_by)
    for away in (64, 96, 127):
        assert np.linalg.norm(colours[127 - away] - colours[128 + away]) > 0.08


@EITHER
def test_the_colour_scale_has_no_jump_where_its_families_meet(theme):
    colours = colour_scale(theme, 0.62)[:, :3].astype(int)
    assert np.abs(np.diff(colours, axis=0)).max() <= 4


def test_a_scale_of_one_family_ends_in_the_colour_of_the_threshold():
    assert np.abs(colour_scale(LIGHT, 1.0)[255].astype(int) - colour_scale(LIGHT, 0.5)[127].astype(int)).max() <= 2
    assert np.abs(colour_scale(LIGHT, 0.0)[0].astype(int) - colour_scale(LIGHT, 0.5)[127].astype(int)).max() <= 2


def test_a_split_outside_the_scale_is_refused():
    with pytest.raises(ValueError, match=r"between 0 and 1, got 1\.5"):
        colour_scale(LIGHT, 1.5)


def test_themes_are_found_by_name_and_know_every_role():
    assert list(THEMES) == ["light", "dark"]
    assert all(set(theme.lines) == set(Role) for theme in THEMES.values())
