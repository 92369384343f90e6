"""What the models of a cloud say, as the cells of a table and in sentences."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING

from app.language import translate as _
from app.units import best_unit, format_quantity
from app.words import number, percent, temperature, times
from physics.constants import boltzmann
from physics.models import Model, Replacement

if TYPE_CHECKING:
    from app.answers.models import ModelsAnswer
    from app.engine import CloudAnswer
    from physics.comparison import ModelRow

_BOSON_COLUMNS = ("critical_temperature", "condensate_fraction", "peak_density", "energy_per_atom")
_FERMION_COLUMNS = ("chemical_potential", "peak_phase_space_density", "peak_density", "energy_per_atom")
_HEADINGS = {
    "critical_temperature": _("condenses below"),
    "condensate_fraction": _("condensed"),
    "chemical_potential": _("µ/k"),
    "peak_phase_space_density": _("peak n λ³"),
    "peak_density": _("peak density"),
    "energy_per_atom": _("energy per atom/k"),
}
OBSTACLES = {
    Replacement.LENGTH_UNKNOWN: _("needs a known scattering length"),
    Replacement.NOT_REPULSIVE: _("needs a positive scattering length"),
    Replacement.BOSONS_ONLY: _("for bosons only"),
    Replacement.HARMONIC_ONLY: _("for harmonic traps only"),
}
LEAST_SUPERFLUID = 1e-3
"""Tc/TF below which the exponentially small estimate of weak attraction says nothing but "never"."""

MEANING = {
    Model.IDEAL: _("No interaction, levels close together. A condensate fills the ground level of the oscillator."),
    Model.SEMI_IDEAL: _("A Thomas-Fermi condensate that repels thermal atoms, which do not repel one another."),
    Model.EXACT_LEVELS: _("No interaction; the levels of the oscillator summed one by one, for any atom number."),
    Model.HARTREE_FOCK: _("All atoms repel one another in the mean field; no finite size."),
}
"""What each model is, for tips."""


def columns_of(answer: ModelsAnswer) -> tuple[str, ...]:
    """Names of the quantities that the table shows."""
    return _BOSON_COLUMNS if answer.bosons else _FERMION_COLUMNS


def headings_of(answer: ModelsAnswer) -> tuple[str, ...]:
    """Headings of the table, without that of the models."""
    return tuple(_HEADINGS[name] for name in columns_of(answer))


def cells_of(answer: ModelsAnswer, model: Model) -> tuple[str, ...]:
    """The cells of a model's row: values, and for models that are not in use how far they are from the one that is."""
    row = answer.rows.get(model)
    count = len(columns_of(answer))
    if row is None:
        return ("…",) * count
    if row.obstacle is not None:
        return (OBSTACLES[row.obstacle], *("",) * (count - 1))
    present = answer.rows.get(answer.present)
    return tuple(_cell(name, row, None if model is answer.present else present) for name in columns_of(answer))


def _cell(name: str, row: ModelRow, present: ModelRow | None) -> str:
    value = float(getattr(row, name))
    if math.isnan(value):
        return "–"
    text = _value(name, value)
    if present is None:
        return text
    difference = difference_text(value, float(getattr(present, name)))
    return f"{text}   {difference}" if difference else text


def _value(name: str, value: float) -> str:
    match name:
        case "critical_temperature":
            return temperature(value)
        case "condensate_fraction":
            return percent(value)
        case "peak_phase_space_density":
            return number(value)
        case "peak_density":
            return format_quantity(value, "1/cm^3", digits=3).replace("1/cm^3", "cm⁻³")
        case _:
            kelvin = value / boltzmann
            return format_quantity(kelvin, best_unit(abs(kelvin), ("nK", "µK", "mK")), digits=4).replace("-", "−")


def difference_text(value: float, reference: float) -> str:
    """How far a value is from another: "+2.1 %", "−0.4 %", "52 ×", "="; empty where that cannot be said."""
    if not (math.isfinite(value) and math.isfinite(reference)) or reference == 0.0:
        return "=" if value == reference else ""
    ratio = value / reference
    if ratio > 2.0:
        return f"{times(ratio)} ×"
    change = 100.0 * (ratio - 1.0) * (1.0 if reference > 0.0 else -1.0)
    if abs(change) < 0.05:
        return "="
    return f"{change:+.1f} %".replace("-", "−")


_HARDLY = 1e-3  # condensed fraction below which none is worth a number


def spread_sentence(answer: ModelsAnswer) -> str:
    """What the choice of a model changes, in one sentence."""
    rows = [row for row in answer.rows.values() if row.obstacle is None]
    if not rows:
        return ""
    if answer.bosons:
        fractions = sorted(float(row.condensate_fraction) for row in rows)
        onsets = sorted(float(row.critical_temperature) for row in rows)
        said = _("By model, {condensed} of the atoms are condensed, and condensation begins at {onset}.")
        if fractions[-1] < _HARDLY:
            said = _("By no model is more than an atom in a thousand condensed; condensation begins at {onset}.")
        return said.format(
            condensed=_range(percent(fractions[0]), percent(fractions[-1])),
            onset=_range(temperature(onsets[0]), temperature(onsets[-1])),
        )
    energies = [float(row.energy_per_atom) for row in rows]
    change = 100.0 * (max(energies) / min(energies) - 1.0)
    return _("Local density and exact levels differ by {change} in the energy.").format(
        change=f"{change:.2g} %" if change >= 0.01 else _("less than 0.01 %")
    )


def _range(low: str, high: str) -> str:
    """Two texts as a range, or the one where they are alike."""
    return low if low == high else _("{low} to {high}").format(low=low, high=high)


def interaction_sentence(cloud: CloudAnswer) -> str:
    """What is estimated of interacting fermions, with where it holds; of bosons, which models know of interaction."""
    if cloud.bosons:
        return _("Tc and the energy of “ideal” and “exact levels” are without interaction.")
    if cloud.cloud.spin_components < 2:
        return _("One spin state of fermions has no s-wave interaction: the ideal gas is all there is.")
    estimates = cloud.solution.estimates
    coupling = float(estimates.interaction_parameter)
    if math.isnan(coupling):
        return _("No estimate of the interaction: the scattering length is not known.")
    said = _("Neither has interaction in it: 1/(kF a) = {coupling}.").format(
        coupling=f"{coupling:.3g}".replace("-", "−")
    )
    if math.isnan(float(estimates.superfluid_temperature)):
        return said + " " + _("Estimates exist below −1, within ±0.2 and above 1; between, it takes crossover theory.")
    fermi = cloud.equilibrium
    below = float(estimates.superfluid_temperature) / float(fermi.fermi_temperature)
    if below < LEAST_SUPERFLUID:
        return said + " " + _("Superfluid only far below any temperature that is reached.")
    said += " " + _("Superfluid below about {ratio} TF ({T}), {regime}.").format(
        ratio=number(below, 2), T=temperature(float(estimates.superfluid_temperature)), regime=_regime(coupling)
    )
    potential = float(estimates.interacting_chemical_potential) / float(fermi.fermi_energy)
    if math.isfinite(potential):
        said += " " + _("At T = 0, µ is about {ratio} EF.").format(ratio=number(potential, 2))
    return said


def _regime(coupling: float) -> str:
    if coupling < -1.0:
        return _("by weak attraction, 1/(kF a) < −1")
    if coupling > 1.0:
        return _("as pairs of twice the mass, 1/(kF a) > 1")
    return _("near unitarity, within ±0.2")
