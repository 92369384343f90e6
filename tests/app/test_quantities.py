"""The table of quantities: complete, computable, and convertible."""

from __future__ import annotations

import math
from collections.abc import Mapping

import pytest

from app.condensate_quantities import CONDENSATE_ATTRIBUTES, THRESHOLD_ATTRIBUTES
from app.quantities import QUANTITIES, Group, Need, display_factor, rows_in
from physics.constants import boltzmann, planck
from physics.equilibria import Equilibrium
from physics.fermi_interactions import FermiEstimates
from physics.rates import Rates

# The names that scripts rely on; the table may grow, none of these may go.
CONTRACT = (
    "thermal_wavelength",
    "mean_frequency",
    "classical_phase_space_density",
    "peak_phase_space_density",
    "fugacity",
    "log_fugacity",
    "chemical_potential",
    "peak_density",
    "mean_density",
    "critical_temperature",
    "critical_temperature_shifted",
    "condensate_fraction",
    "condensate_atoms",
    "fermi_temperature",
    "fermi_energy",
    "fermi_wavenumber",
    "reduced_temperature",
    "thermal_radii",
    "condensate_radii",
    "energy_per_atom",
    "elastic_collision_rate",
    "mean_free_path",
    "three_body_lifetime",
    "truncation",
    "classical_density_error",
    "classical_energy_error",
    "temperature_to_threshold",
    "atoms_to_threshold",
    "atoms_left_at_target",
)


def test_every_name_of_the_contract_is_there() -> None:
    assert set(CONTRACT) <= set(QUANTITIES)


@pytest.mark.parametrize("name", QUANTITIES)
def test_every_row_is_a_quantity_of_the_equilibrium_and_says_all_about_itself(name: str) -> None:
    row = QUANTITIES[name]
    holders = (Equilibrium, Rates, FermiEstimates, CONDENSATE_ATTRIBUTES, THRESHOLD_ATTRIBUTES)
    found = [name in holder if isinstance(holder, Mapping) else hasattr(holder, name) for holder in holders]
    assert found.count(True) == 1
    assert all((row.label, row.symbol, row.formula, row.source, row.validity))
    for unit in row.units:
        assert display_factor(unit, row) > 0.0


def test_the_groups_hold_every_row_once() -> None:
    found = [row.name for group in Group for row in rows_in(group)]
    assert sorted(found) == sorted(QUANTITIES)


def test_an_energy_may_be_read_as_a_temperature_or_a_frequency() -> None:
    row = QUANTITIES["chemical_potential"]
    assert math.isclose(display_factor("nK", row), 1e-9 * boltzmann, rel_tol=1e-14)
    assert math.isclose(display_factor("kHz", row), 1e3 * planck, rel_tol=1e-14)
    assert math.isclose(
        display_factor("kHz", QUANTITIES["critical_temperature"]), 1e3 * planck / boltzmann, rel_tol=1e-14
    )


def test_no_quantity_needs_both_kinds_of_gas() -> None:
    assert not any({Need.BOSONS, Need.FERMIONS} <= set(row.needs) for row in QUANTITIES.values())
