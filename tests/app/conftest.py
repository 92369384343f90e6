"""What tests of the program share: patience, and pictures made up for the tests of drawing: a map, a slice, a profile,
each for a strength to vary."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial

import numpy as np
import pytest
from pytestqt.qtbot import QtBot

from app.figures.picture import Axis, Curve, Field, Label, Mark, Picture, Role

PictureMaker = Callable[[float], Picture]
PATIENCE = 60_000
"""Milliseconds after which what a test waits for is taken not to come, on a machine that has much else to do."""


@pytest.fixture
def qtbot(qtbot: QtBot) -> QtBot:
    """Waits patiently."""
    qtbot.waitUntil = partial(qtbot.waitUntil, timeout=PATIENCE)
    return qtbot


def map_like(strength: float = 1.0) -> Picture:
    """Decades of N^1 T^-3, a threshold, and a cloud with its ellipse that may be dragged."""
    atoms, kelvin = np.geomspace(1e3, 1e8, 100), np.geomspace(1e-9, 1e-3, 100)
    decades = np.log10(atoms) + 3.0 * (np.log10(4.5e-9 * strength) - np.log10(kelvin)[:, np.newaxis])
    shade = np.clip(0.6 + np.where(decades < 0.0, decades / 20.0, decades / 10.0), 0.0, 1.0)
    lines, labels = [], []
    for decade in range(-12, 1, 2):
        lines += [np.column_stack([atoms, 4.5e-9 * strength * (atoms / 10.0**decade) ** (1 / 3)]), [[np.nan, np.nan]]]
        x, y = lines[-2][70]
        labels.append(Label(text=f"10^{decade}", role=Role.DECADE, x=float(x), y=float(y)))
    x, y = np.concatenate(lines).T
    turn = np.linspace(0.0, 2.0 * np.pi, 61)
    outline = Curve(
        name="", role=Role.UNCERTAINTY, x=1e5 * 10 ** (0.1 * np.cos(turn)), y=2e-6 * 10 ** (0.05 * np.sin(turn))
    )
    threshold = 4.2e-9 * strength * atoms ** (1 / 3)
    return Picture(
        title="where the cloud stands",
        x=Axis(label="atoms N", unit="", low=1e3, high=1e8, log=True),
        y=Axis(label="temperature T", unit="K", low=1e-9, high=1e-3, log=True, prefixed=True),
        curves=(
            Curve(name="decades", role=Role.DECADE, x=x, y=y),
            Curve(name="threshold", role=Role.THRESHOLD, x=atoms, y=threshold),
            Curve(name="threshold, shifted", role=Role.THRESHOLD_SHIFTED, x=atoms, y=0.95 * threshold),
            Curve(name="half condensed", role=Role.FRACTION, x=atoms, y=0.8 * threshold),
        ),
        field=Field(x=atoms, y=kelvin, shade=shade, split=0.6, bar_label="phase-space density",
                    ticks=((0.1, "10⁻¹⁰"), (0.35, "10⁻⁵"), (0.6, "1"))),
        marks=(Mark(name="cloud", role=Role.CLOUD, x=1e5, y=2e-6 * strength, draggable=True, outline=outline),),
        labels=tuple(labels),
        summary=f"The cloud is {strength:g} times as warm.",
    )  # fmt: skip


def slice_like(strength: float = 1.0) -> Picture:
    kelvin = np.geomspace(1e-9, 1e-3, 300)
    roles = (Role.FIRST, Role.SECOND, Role.THIRD, Role.FOURTH)
    ratio = kelvin / (1e-6 * strength)
    curves = [
        Curve(name=f"quantity {i}", role=role, x=kelvin, y=1e6 / (1.0 + (ratio / 3.0**i) ** 2) + 1.0)
        for i, role in enumerate(roles)
    ]
    return Picture(
        title="against temperature",
        x=Axis(label="temperature T", unit="K", low=1e-9, high=1e-3, log=True, prefixed=True),
        y=Axis(label="elastic collision rate of one atom", unit="1/s", low=1.0, high=1e7, log=True),
        curves=tuple(curves),
        marks=(Mark(name="cloud", role=Role.CLOUD, x=1e-6, y=1e3),),
    )


def profile_like(strength: float = 1.0) -> Picture:
    place = np.linspace(-100.0, 100.0, 401)
    thermal = 1e13 * np.exp(-0.5 * (place / (20.0 * strength)) ** 2)
    condensate = 3e13 * np.clip(1.0 - (place / (12.0 * strength)) ** 2, 0.0, None)
    return Picture(
        title="density along x through the centre",
        x=Axis(label="position x", unit="µm", low=-100.0, high=100.0),
        y=Axis(label="density n", unit="1/cm^3", low=0.0, high=4.5e13),
        curves=(
            Curve(name="total", role=Role.TOTAL, x=place, y=thermal + condensate),
            Curve(name="thermal", role=Role.THERMAL, x=place, y=thermal),
            Curve(name="condensate", role=Role.CONDENSATE, x=place, y=condensate),
            Curve(name="classical cloud", role=Role.CLASSICAL, x=place, y=1.5 * thermal),
        ),
    )


MAKERS: dict[str, PictureMaker] = {"map": map_like, "slice": slice_like, "profile": profile_like}


@pytest.fixture(params=MAKERS.values(), ids=MAKERS.keys())
def any_picture(request: pytest.FixtureRequest) -> PictureMaker:
    """Each kind of picture in turn, as a function of its strength."""
    return request.param  # type: ignore[no-any-return]


@pytest.fixture
def a_map() -> PictureMaker:
    return map_like


@pytest.fixture
def a_slice() -> PictureMaker:
    return slice_like


@pytest.fixture
def a_profile() -> PictureMaker:
    return profile_like
