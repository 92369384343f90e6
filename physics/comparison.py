"""One cloud by every model: what the choice of a model changes."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np

from physics.checks import Floats
from physics.cloud import Cloud, equilibrium
from physics.models import AVAILABLE_MODELS, Model, Replacement
from physics.thresholds import Thresholds


@dataclass(frozen=True, kw_only=True, eq=False)
class ModelRow:
    """What a model says of a cloud; NaN where it cannot hold, and of fermions where a quantity is of bosons.

    Attributes
    ----------
    model : Model
    obstacle : Replacement or None. Why the model cannot hold.
    critical_temperature : array. [K] Threshold of the model at this atom number.
    reduced_temperature : array. [1] T over that threshold.
    condensate_fraction : array. [1]
    condensate_atoms : array. [1]
    chemical_potential : array. [J] From the bottom of the trap.
    peak_phase_space_density : array. [1] Of the thermal atoms.
    peak_density : array. [1/m^3] Condensate included: in ideal and exact the ground level of the oscillator, far denser
        than a condensate that repels itself.
    energy_per_atom : array. [J]
    """

    model: Model
    obstacle: Replacement | None
    critical_temperature: Floats
    reduced_temperature: Floats
    condensate_fraction: Floats
    condensate_atoms: Floats
    chemical_potential: Floats
    peak_phase_space_density: Floats
    peak_density: Floats
    energy_per_atom: Floats


def compare_models(cloud: Cloud, models: Iterable[Model] = AVAILABLE_MODELS) -> tuple[ModelRow, ...]:
    """A row for each model, in their order.

    Parameters
    ----------
    cloud : Cloud. One, or an array of them, whose shape the numbers broadcast to.
    models : the models to compare.
    """
    return tuple(_row(cloud, model) for model in models)


def _row(cloud: Cloud, model: Model) -> ModelRow:
    solved = equilibrium(cloud, model)
    if solved.replaced is not None:
        unknown: Floats = np.full((), np.nan)[()]
        return ModelRow(
            model=model,
            obstacle=solved.replaced,
            critical_temperature=unknown,
            reduced_temperature=unknown,
            condensate_fraction=unknown,
            condensate_atoms=unknown,
            chemical_potential=unknown,
            peak_phase_space_density=unknown,
            peak_density=unknown,
            energy_per_atom=unknown,
        )
    threshold = Thresholds(equilibrium=solved).of_model
    return ModelRow(
        model=model,
        obstacle=None,
        critical_temperature=threshold,
        reduced_temperature=cloud.temperature / threshold,
        condensate_fraction=solved.condensate_fraction,
        condensate_atoms=solved.condensate_atoms,
        chemical_potential=solved.chemical_potential,
        peak_phase_space_density=solved.peak_phase_space_density,
        peak_density=solved.peak_density,
        energy_per_atom=solved.energy_per_atom,
    )
