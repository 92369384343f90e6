"""The plan's cloud by every model that could describe it: what the choice of a model changes."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

from app.answers.cloud import CloudAnswer, cloud_answer
from app.answers.part import part
from physics.cloud import AVAILABLE_MODELS, Model, equilibrium
from physics.comparison import ModelRow, compare_models
from physics.first_order import condensate_fraction, interaction_scale

if TYPE_CHECKING:
    from app.plan import Plan

Array = NDArray[np.float64]

COOLEST = 0.05
"""T/Tc or T/TF of the first point of a curve: colder clouds change little and take longest."""

_POINTS = 81
_FEW_POINTS = 41
_BOSON_MODELS = (Model.IDEAL, Model.SEMI_IDEAL, Model.EXACT_LEVELS, Model.HARTREE_FOCK)
_FERMION_MODELS = (Model.IDEAL, Model.EXACT_LEVELS)


@dataclass(frozen=True, kw_only=True, eq=False)
class ModelCurve:
    """What a model says against reduced temperature: the condensed fraction of bosons, mu/EF of fermions. [1]"""

    model: Model
    reduced_temperature: Array
    value: Array


@dataclass(frozen=True, kw_only=True, eq=False)
class ModelsAnswer:
    """The models of a cloud, so far as they have been worked out.

    models : all that describe such atoms, in the order in which they are shown
    present : the model in use
    rows : by model, of those that are done
    curves : of those that are done and can hold
    first_order : the condensed fraction by first-order shifts, NaN where these are too large, on the grid of
        `first_order_grid`; empty for fermions
    reduced_temperature, now : where the cloud stands on the curves
    reach : T/Tc or T/TF at which the curves end
    estimate : mu/EF of the interacting gas at T = 0, NaN where there is no simple estimate; of fermions
    superfluid : T/TF below which the mixture is superfluid, NaN where there is no estimate; of fermions
    """

    bosons: bool
    models: tuple[Model, ...]
    present: Model
    rows: dict[Model, ModelRow]
    curves: tuple[ModelCurve, ...]
    first_order_grid: Array
    first_order: Array
    reduced_temperature: float
    now: float
    reach: float
    estimate: float
    superfluid: float

    @property
    def complete(self) -> bool:
        """Whether all models are done."""
        return len(self.rows) == len(self.models)


def models_of(cloud: CloudAnswer) -> tuple[Model, ...]:
    """The models that describe such atoms, quick ones first."""
    models = _BOSON_MODELS if cloud.bosons else _FERMION_MODELS
    return tuple(model for model in models if model in AVAILABLE_MODELS)


def models_answer(
    plan: Plan,
    deliver: Callable[[ModelsAnswer], bool] = lambda _answer: True,
    tick: Callable[[float], bool] = lambda _share: True,
) -> ModelsAnswer | None:
    """All models of the plan's cloud, one after the other.

    `deliver` is given what is there after each model but the last, `tick` the share that is done; a false answer of
    either stops the work, and the result is None.
    """
    central = cloud_answer(plan)
    models = models_of(central)
    reach = _reach(central)
    rows: dict[Model, ModelRow] = {}
    curves: list[ModelCurve] = []
    for done, model in enumerate(models):
        rows[model] = _row(plan, model)
        if rows[model].obstacle is None:
            curves.append(_curve(plan, model, reach))
        if not tick((done + 1) / len(models)):
            return None
        if done + 1 < len(models) and not deliver(_answer(central, models, rows, curves, reach)):
            return None
    return _answer(central, models, rows, curves, reach)


def _answer(
    central: CloudAnswer,
    models: tuple[Model, ...],
    rows: dict[Model, ModelRow],
    curves: list[ModelCurve],
    reach: float,
) -> ModelsAnswer:
    solved = central.equilibrium
    reduced = float(solved.reduced_temperature)
    grid, first_order = _first_order(central, reach)
    now = float(solved.condensate_fraction) if central.bosons else _mu_over_fermi(central)
    fermi_energy = float(solved.fermi_energy)
    estimates = central.solution.estimates
    return ModelsAnswer(
        bosons=central.bosons,
        models=models,
        present=central.model,
        rows=dict(rows),
        curves=tuple(curves),
        first_order_grid=grid,
        first_order=first_order,
        reduced_temperature=reduced,
        now=now,
        reach=reach,
        estimate=float(estimates.interacting_chemical_potential) / fermi_energy,
        superfluid=float(estimates.superfluid_temperature) / float(solved.fermi_temperature),
    )


def _mu_over_fermi(central: CloudAnswer) -> float:
    return float(central.equilibrium.chemical_potential) / float(central.equilibrium.fermi_energy)


def _reach(central: CloudAnswer) -> float:
    """As far as the cloud, in steps, if that is not out of all proportion."""
    least, most, step = (1.25, 2.0, 0.25) if central.bosons else (1.0, 2.0, 0.5)
    reduced = float(central.equilibrium.reduced_temperature)
    return least if reduced > most else max(least, step * float(np.ceil(1.05 * reduced / step)))


@part("species", "trap", "cloud.atoms", "cloud.temperature")
def _row(plan: Plan, model: Model) -> ModelRow:
    return compare_models(cloud_answer(plan).cloud, (model,))[0]


@part("species", "trap", "cloud.atoms")
def _curve(plan: Plan, model: Model, reach: float) -> ModelCurve:
    """The temperature of the plan does not enter."""
    central = cloud_answer(plan)
    slow = model in (Model.EXACT_LEVELS, Model.HARTREE_FOCK)
    t = np.linspace(COOLEST, reach, _FEW_POINTS if slow else _POINTS)
    solved = central.equilibrium
    scale = float(solved.critical_temperature if central.bosons else solved.fermi_temperature)
    cloud = replace(central.cloud, temperature=t * scale)
    if central.bosons:
        values = equilibrium(cloud, model).condensate_fraction
    else:
        values = np.asarray(equilibrium(cloud, model).chemical_potential) / float(solved.fermi_energy)
    return ModelCurve(model=model, reduced_temperature=t, value=np.broadcast_to(values, t.shape))


def _first_order(central: CloudAnswer, reach: float) -> tuple[Array, Array]:
    if not central.bosons:
        return np.empty(0), np.empty(0)
    t = np.linspace(0.0, min(reach, 1.0), _POINTS)
    solved, cloud = central.equilibrium, central.cloud
    scale = interaction_scale(cloud.atoms, cloud.length, solved.oscillator_length)
    return t, condensate_fraction(t, solved.finite_size_shift, scale)
