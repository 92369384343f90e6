"""Why a quantity of an answer has the value it has."""

from __future__ import annotations

import math
from collections.abc import Callable
from types import MappingProxyType
from typing import TYPE_CHECKING

import numpy as np

from app.explanations import (
    classical,
    collisions,
    condensate,
    degeneracy,
    densities,
    fermi_sea,
    inputs,
    losses,
    scales,
    sizes,
)
from app.explanations.explanation import Explanation, Origin, Step
from app.explanations.sheet import Regime, Sheet
from app.quantities import QUANTITIES, Need, Row
from app.words import number, range_text, reason_missing, shown_unit, symbol_of, value_text
from physics.models import Model
from physics.species_names import nearest_first

if TYPE_CHECKING:
    from app.engine import CloudAnswer

EXPLAINED: MappingProxyType[str, Callable[[Sheet], object]] = MappingProxyType(
    {
        "peak_phase_space_density": degeneracy.peak_phase_space_density,
        "reduced_temperature": scales.reduced_temperature,
        "classical_phase_space_density": scales.classical_phase_space_density,
        "fugacity": degeneracy.fugacity,
        "log_fugacity": degeneracy.log_fugacity,
        "chemical_potential": degeneracy.chemical_potential,
        "critical_temperature": scales.critical_temperature,
        "critical_temperature_shifted": scales.critical_temperature_shifted,
        "fermi_temperature": scales.fermi_temperature,
        "fermi_energy": scales.fermi_energy,
        "fermi_wavenumber": scales.fermi_wavenumber,
        "fermi_radii": fermi_sea.fermi_radii,
        "interaction_parameter": fermi_sea.interaction_parameter,
        "superfluid_temperature": fermi_sea.superfluid_temperature,
        "interacting_chemical_potential": fermi_sea.interacting_chemical_potential,
        "pair_binding_energy": fermi_sea.pair_binding_energy,
        "temperature_to_threshold": scales.temperature_to_threshold,
        "atoms_to_threshold": scales.atoms_to_threshold,
        "atoms_left_at_target": scales.atoms_left_at_target,
        "condensate_fraction": degeneracy.condensate_fraction,
        "condensate_atoms": degeneracy.condensate_atoms,
        "critical_temperature_exact_levels": condensate.critical_temperature_exact_levels,
        "condensate_interaction": condensate.interaction,
        "condensate_rms_radii": condensate.condensate_rms_radii,
        "condensate_release_energy": condensate.condensate_release_energy,
        "healing_length": condensate.healing_length,
        "collapse_atoms": condensate.collapse_atoms,
        "dipolar_ratio": condensate.dipolar_ratio,
        "condensate_radii": sizes.condensate_radii,
        "thermal_radii": sizes.thermal_radii,
        "peak_density": densities.peak_density,
        "mean_density": densities.mean_density,
        "energy_per_atom": sizes.energy_per_atom,
        "thermal_wavelength": scales.thermal_wavelength,
        "mean_frequency": scales.mean_frequency,
        "truncation": scales.truncation,
        "collision_cross_section": collisions.collision_cross_section,
        "elastic_collision_rate": collisions.elastic_collision_rate,
        "peak_collision_rate": collisions.peak_collision_rate,
        "mean_free_path": collisions.mean_free_path,
        "rethermalisation_time": collisions.rethermalisation_time,
        "hydrodynamic_ratio": collisions.hydrodynamic_ratio,
        "free_path_ratios": collisions.free_path_ratios,
        "good_to_bad_ratio": losses.good_to_bad_ratio,
        "background_lifetime": losses.background_lifetime,
        "two_body_lifetime": losses.two_body_lifetime,
        "three_body_lifetime": losses.three_body_lifetime,
        "spin_flip_lifetime": losses.spin_flip_lifetime,
        "total_lifetime": losses.total_lifetime,
        "loss_per_rethermalisation": losses.loss_per_rethermalisation,
        "loss_heating_rate": losses.loss_heating_rate,
        "scattering_rate": losses.scattering_rate,
        "light_heating_rate": losses.light_heating_rate,
        "heating_rate": losses.heating_rate,
        "three_body_ceiling": losses.three_body_ceiling,
        "harmonic_reduced_temperature": scales.harmonic_reduced_temperature,
        "harmonic_peak_phase_space_density": degeneracy.harmonic_peak_phase_space_density,
        "harmonic_condensate_fraction": degeneracy.harmonic_condensate_fraction,
        "classical_density_error": classical.classical_density_error,
        "classical_energy_error": classical.classical_energy_error,
        "classical_pressure_error": classical.classical_pressure_error,
        "fitted_temperature_error": classical.fitted_temperature_error,
    }
)
"""What puts the steps to a quantity, by its NAME, on a sheet; a NAME without an entry is explained by its row alone."""

_MODELS = MappingProxyType(
    {
        Model.IDEAL: "no interaction; local density, many levels within kT",
        Model.EXACT_LEVELS: "no interaction; the discrete levels of the oscillator summed",
        Model.SEMI_IDEAL: "a Thomas-Fermi condensate that repels thermal atoms, which do not repel one another",
        Model.HARTREE_FOCK: "condensate and thermal atoms in the mean field of all; local density",
    }
)


def explain(answer: CloudAnswer, name: str, unit: str | None = None) -> Explanation:
    """Inputs, formulas and intermediate values behind a quantity.

    Parameters
    ----------
    answer : of one cloud
    name : NAME of the quantity
    unit : one of those offered for it, in which `text` gives the value; None is the first

    Raises
    ------
    ValueError : for an unknown name; the sentence has the nearest ones.
    """
    row = QUANTITIES.get(name)
    if row is None:
        nearest = ", ".join(nearest_first(name, QUANTITIES)[:3])
        raise ValueError(f'no quantity is named "{name}"; the nearest are {nearest}')
    sheet, values = Sheet(answer), _values(answer, row)
    if values is not None and name in EXPLAINED:
        EXPLAINED[name](sheet)
    else:
        _lay_out(sheet, row)
    value = None if values is None else values if row.axes else values[0]
    return Explanation(
        name=name,
        title=row.label,
        symbol=symbol_of(row, answer),
        value=value,
        unit=row.unit,
        text=_text(answer, row, unit or row.units[0]) if values is not None else "–",
        reason="" if values is not None else reason(answer, row),
        formula=(answer.real_trap is not None and row.in_real_trap) or row.formula,
        model=_model(answer),
        inputs=tuple(entry for origin in Origin for entry in sheet.inputs if entry.origin is origin),
        steps=tuple(sheet.steps),
        validity=row.validity,
        source=row.source,
    )


def _values(answer: CloudAnswer, row: Row) -> tuple[float, ...] | None:
    """The value or values, in SI; None where any is not a number."""
    if answer.missing(row) is not None:
        return None
    values = tuple(float(value) for value in np.atleast_1d(np.asarray(answer.value(row.name), dtype=float)))
    return values if all(math.isfinite(value) for value in values) else None


def _lay_out(sheet: Sheet, row: Row) -> None:
    """What can be said without steps to a value: the inputs, and the comparison or the steps that show why."""
    if row.name == "critical_temperature_shifted" and sheet.bosons:
        scales.critical_temperature_shifted(sheet)
        return
    inputs.atoms(sheet), inputs.temperature(sheet), inputs.frequencies(sheet), inputs.mass(sheet)
    inputs.spin_states(sheet), inputs.scattering_length(sheet)
    needs = sheet.answer.missing(row)
    if needs in (Need.CONDENSATE, Need.INTERACTING_CONDENSATE) and sheet.regime is Regime.THERMAL:
        degeneracy.condensed(sheet)


def _text(answer: CloudAnswer, row: Row, unit: str) -> str:
    """The value with its unit, and its interval where there is one."""
    shown = shown_unit(unit)
    text, interval = f"{value_text(answer, row, unit)} {shown}".strip(), range_text(answer, row, unit)
    return f"{text} ({f'{interval} {shown}'.strip()}, 16 to 84 %)" if interval else text


def _model(answer: CloudAnswer) -> str:
    used, asked = answer.model, answer.plan.cloud.model or Model.SEMI_IDEAL
    sentence = f"{used.value}: {_MODELS.get(used, used.value)}"
    replaced = answer.equilibrium.replaced
    return sentence if replaced is None else f"{sentence} (instead of {asked.value}: {replaced.value})"


# ---------------------------------------------------------------- why there is no value


def reason(answer: CloudAnswer, row: Row) -> str:
    """Why a quantity has no value for this cloud."""
    need, solved = answer.missing(row), answer.equilibrium
    match need:
        case Need.BOSONS | Need.FERMIONS:
            return f"{reason_missing(need)}; {answer.state.key} is a {answer.state.statistics.value}"
        case Need.CONDENSATE | Need.INTERACTING_CONDENSATE:
            return f"{reason_missing(need)}; {_no_condensate(answer)}"
        case Need.SCATTERING_LENGTH | Need.COLLISIONS:
            return f"{reason_missing(need)}; {_no_length(answer)}"
        case None:
            if row.name == "mean_free_path" and not float(solved.elastic_collision_rate) > 0.0:
                return "the atoms do not collide"
            if row.name == "critical_temperature_shifted":
                return "the first-order shifts add up to all of Tc: this cloud is far outside their range"
            if row.name == "fugacity":
                return "beyond the largest number that can be computed with; its logarithm is not"
            return "not defined for this cloud"
        case Need.DEPTH | Need.EFFICIENCY:
            return f"{reason_missing(need)}, which the plan does not give"
        case _:
            return reason_missing(need)


def _no_condensate(answer: CloudAnswer) -> str:
    if not float(answer.equilibrium.condensate_fraction) > 0.0:
        return f"nothing is condensed at T/Tc = {number(float(answer.equilibrium.reduced_temperature))}"
    if answer.cloud.scattering_length is None:
        return _no_length(answer)
    return f"the model {answer.model.value} gives the condensate the shape of the ground level"


def _no_length(answer: CloudAnswer) -> str:
    why = answer.scattering.reason
    return why.value if why is not None else "the scattering length is not known"


# ---------------------------------------------------------------- what is not explained yet


def unexplained(answer: CloudAnswer) -> tuple[str, ...]:
    """The NAMEs that have a value for this cloud and no steps that lead all the way to it."""

    def stops_short(name: str, row: Row) -> bool:
        return _values(answer, row) is not None and not explain(answer, name).complete

    return tuple(name for name, row in QUANTITIES.items() if stops_short(name, row))


def disagreeing(explanation: Explanation) -> tuple[Step, ...]:
    """Steps whose arithmetic does not give their result: a defect."""
    return tuple(step for step in explanation.steps if not step.agrees)
