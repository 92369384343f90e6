"""Models side by side: each row is what the model itself says, or why it cannot."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest

from physics.cloud import AVAILABLE_MODELS, Equilibrium, Model, Replacement
from physics.comparison import compare_models
from physics.thresholds import Thresholds

Maker = Callable[..., Equilibrium]


@pytest.mark.parametrize("temperature", [6e-8, 1.24e-7, 3e-7])
def test_rows_are_the_answers_of_the_models(bosons: Maker, temperature: float) -> None:
    rows = compare_models(bosons(temperature=temperature).cloud)
    assert tuple(row.model for row in rows) == AVAILABLE_MODELS
    for row in rows:
        solved = bosons(row.model, temperature=temperature)
        assert row.obstacle is None
        assert row.critical_temperature == Thresholds(equilibrium=solved).of_model
        assert row.reduced_temperature == pytest.approx(temperature / float(row.critical_temperature), rel=1e-14)
        for name in ("condensate_fraction", "condensate_atoms", "chemical_potential", "peak_phase_space_density",
                     "peak_density", "energy_per_atom"):  # fmt: skip
            assert getattr(row, name) == getattr(solved, name), name


def test_the_order_of_models_below_threshold(bosons: Maker) -> None:
    # Repulsion and finite size both lower the threshold and the condensed fraction; an ideal condensate is densest.
    rows = {row.model: row for row in compare_models(bosons(temperature=9e-8).cloud)}
    ideal, exact = rows[Model.IDEAL], rows[Model.EXACT_LEVELS]
    semi, mean_field = rows[Model.SEMI_IDEAL], rows[Model.HARTREE_FOCK]
    assert exact.critical_temperature < ideal.critical_temperature == semi.critical_temperature
    assert mean_field.critical_temperature < ideal.critical_temperature
    assert mean_field.condensate_fraction < semi.condensate_fraction < ideal.condensate_fraction
    assert exact.condensate_fraction < ideal.condensate_fraction
    assert semi.peak_density < 0.1 * ideal.peak_density
    assert mean_field.energy_per_atom > semi.energy_per_atom > ideal.energy_per_atom


def test_a_model_that_cannot_hold_says_why(bosons: Maker, fermions: Maker) -> None:
    rows = {row.model: row for row in compare_models(bosons(scattering_length=None).cloud)}
    for model in (Model.SEMI_IDEAL, Model.HARTREE_FOCK):
        assert rows[model].obstacle is Replacement.LENGTH_UNKNOWN
        assert math.isnan(rows[model].peak_density)
    assert rows[Model.IDEAL].obstacle is rows[Model.EXACT_LEVELS].obstacle is None
    of_fermions = {row.model: row for row in compare_models(fermions().cloud)}
    assert of_fermions[Model.SEMI_IDEAL].obstacle is Replacement.BOSONS_ONLY
    assert of_fermions[Model.IDEAL].peak_density == fermions().peak_density


def test_many_clouds_at_once(bosons: Maker) -> None:
    cloud = bosons(atoms=np.array([1e4, 1e5]), temperature=6e-8).cloud
    (row,) = compare_models(cloud, [Model.HARTREE_FOCK])
    assert row.condensate_fraction.shape == (2,)
    assert row.critical_temperature.shape == (2,)
