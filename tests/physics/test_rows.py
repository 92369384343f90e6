"""Arrays answered row by row: the same answer, progress told, work stopped."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import numpy as np
import pytest

from physics import rows
from physics.cloud import AVAILABLE_MODELS, Equilibrium, Model, equilibrium
from physics.rows import answer_rows
from physics.traps import HarmonicTrap

Maker = Callable[..., Equilibrium]
NAMES = (
    "peak_phase_space_density",
    "condensate_fraction",
    "reduced_temperature",
    "critical_temperature",
    "thermal_radii",
)


@pytest.fixture
def few_at_once(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(rows, "CELLS_AT_ONCE", 10)


@pytest.mark.parametrize("model", AVAILABLE_MODELS)
def test_rows_give_what_one_call_gives(bosons: Maker, few_at_once: None, model: Model) -> None:
    cloud = bosons(atoms=np.geomspace(1e3, 1e6, 5), temperature=np.geomspace(2e-8, 1e-6, 7)[:, np.newaxis]).cloud
    answer = answer_rows(cloud, model, NAMES)
    assert answer is not None
    whole = equilibrium(cloud, model)
    for name, value in zip(NAMES, answer, strict=True):
        shape = (7, 5, 3) if name == "thermal_radii" else (7, 5)
        assert value.shape == shape
        np.testing.assert_allclose(value, np.broadcast_to(getattr(whole, name), shape), rtol=1e-13, err_msg=name)


def test_everything_that_may_be_an_array_is_cut(bosons: Maker, few_at_once: None) -> None:
    frequencies = np.linspace(50.0, 200.0, 18).reshape(6, 1, 3)
    depth, length = np.geomspace(1e-29, 1e-28, 6)[:, np.newaxis], np.linspace(1e-9, 6e-9, 24).reshape(6, 4)
    cloud = replace(
        bosons(atoms=np.geomspace(1e4, 1e5, 4)).cloud,
        trap=HarmonicTrap(frequencies=frequencies, depth=depth),
        scattering_length=length,
    )
    answer = answer_rows(cloud, Model.HARTREE_FOCK, ("peak_density", "truncation"))
    assert answer is not None
    whole = equilibrium(cloud, Model.HARTREE_FOCK)
    np.testing.assert_allclose(answer[0], whole.peak_density, rtol=1e-13)
    np.testing.assert_allclose(answer[1], np.broadcast_to(whole.truncation, (6, 4)), rtol=1e-13)


def test_one_dimension_and_a_longer_first_axis(bosons: Maker, few_at_once: None) -> None:
    cloud = bosons(temperature=np.geomspace(5e-8, 1e-6, 33)).cloud
    answer = answer_rows(cloud, None, ("condensate_fraction",))
    assert answer is not None
    np.testing.assert_allclose(answer[0], equilibrium(cloud).condensate_fraction, rtol=1e-13)


def test_progress_is_told_and_ends_at_all(bosons: Maker, few_at_once: None) -> None:
    cloud = bosons(atoms=np.geomspace(1e3, 1e6, 5), temperature=np.geomspace(2e-8, 1e-6, 7)[:, np.newaxis]).cloud
    told: list[float] = []

    def tick(share: float) -> bool:
        told.append(share)
        return True

    assert answer_rows(cloud, Model.HARTREE_FOCK, NAMES, tick) is not None
    assert told == pytest.approx([2 / 7, 4 / 7, 6 / 7, 1.0])


def test_work_stops_when_told_to(bosons: Maker, few_at_once: None) -> None:
    cloud = bosons(atoms=np.geomspace(1e3, 1e6, 5), temperature=np.geomspace(2e-8, 1e-6, 7)[:, np.newaxis]).cloud
    told: list[float] = []

    def tick(share: float) -> bool:
        told.append(share)
        return share < 0.5

    assert answer_rows(cloud, Model.HARTREE_FOCK, NAMES, tick) is None
    assert told == pytest.approx([2 / 7, 4 / 7])


def test_a_single_cloud_has_no_rows(bosons: Maker) -> None:
    with pytest.raises(ValueError, match=r"^rows are of an array of clouds, got a single cloud$"):
        answer_rows(bosons().cloud, None, NAMES)
