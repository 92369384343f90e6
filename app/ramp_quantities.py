"""One row for every column of a simulated ramp: name, label, symbol, units. JSON, tables, CSV and plots read this list.

A row's `name` is the attribute of `physics.evaporation_rows.Rows` that holds the numbers, or "time". What a cloud at
rest has too is taken from `app.quantities`.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from types import MappingProxyType

from app.control_kinds import CONTROL_KINDS
from app.quantities import QUANTITIES
from physics.ramps import Control

_KELVIN = ("µK", "nK", "mK", "K")
_RATES = ("1/s",)


@dataclass(frozen=True, kw_only=True)
class RampColumn:
    """A column. `unit` is its SI unit, `units` are offered for display, and `formula` says what it is."""

    name: str
    label: str
    symbol: str
    unit: str
    units: tuple[str, ...]
    formula: str


def _shared(name: str, *, formula: str = "") -> RampColumn:
    row = QUANTITIES[name]
    return RampColumn(
        name=name,
        label=row.label,
        symbol=row.symbol,
        unit=row.unit,
        units=row.units,
        formula=formula or row.formula,
    )


def _own(name: str, label: str, symbol: str, unit: str, units: tuple[str, ...], formula: str) -> RampColumn:
    return RampColumn(name=name, label=label, symbol=symbol, unit=unit, units=units, formula=formula)


_COLUMNS = (
    _own("time", "time", "t", "s", ("s", "ms", "min"), "from the start of the ramp"),
    _own("atoms", "atoms", "N", "1", ("1",), "per spin state"),
    _own("temperature", "temperature", "T", "K", _KELVIN, "of the cut classical cloud of this energy"),
    _shared("peak_phase_space_density"),
    _shared("reduced_temperature"),
    _shared("truncation"),
    _shared("elastic_collision_rate", formula="mean over the cut cloud"),
    _own("depth", "trap depth", "U", "J", (*_KELVIN, "kHz", "J"), "lowest way out over the minimum"),
    _own("energy", "energy", "E", "J", ("J",), "of all atoms, from the bottom of the trap"),
    _shared("classical_phase_space_density", formula="n(0) λ³ of the cut classical cloud"),
    _shared("condensate_atoms", formula="of ideal bosons in the cut trap"),
    _shared("peak_density", formula="of the cut classical cloud"),
    _shared("peak_collision_rate"),
    _own("evaporation_rate", "evaporation", "Γ_ev", "1/s", _RATES, "loss per atom over the depth, by collisions"),
    _own("spilling_rate", "spilling", "Γ_sp", "1/s", _RATES, "loss per atom as the depth falls past its energy"),
    _own("background_rate", "background loss", "Γ₁", "1/s", _RATES, "per atom"),
    _own("two_body_rate", "two-body loss", "Γ₂", "1/s", _RATES, "per atom"),
    _own("three_body_rate", "three-body loss", "Γ₃", "1/s", _RATES, "per atom"),
    _own("spin_flip_rate", "spin flips", "Γ_flip", "1/s", _RATES, "per atom, at the zero of the field"),
    _shared("good_to_bad_ratio", formula="mean elastic rate over all known losses, evaporation apart"),
    _shared("hydrodynamic_ratio"),
    _own("adiabaticity", "change of the trap in its period", "|dω/dt|/ω²", "1", ("1",), "below 0.1: slow"),
    _own("depth_change", "change of the depth", "|d ln U/dt| τ_th", "1", ("1",), "below 1: the cloud can follow"),
    _own("evaporated_energy", "energy of an evaporated atom", "η + κ", "1", ("1",), "over kT"),
)  # fmt: skip

RAMP_COLUMNS: Mapping[str, RampColumn] = MappingProxyType({column.name: column for column in _COLUMNS})
"""NAME -> column, in the order of JSON."""


def control_column(control: Control) -> RampColumn:
    """The column of a control. Its name is the control's label, such as "power A"."""
    kind = CONTROL_KINDS[control.knob]
    return RampColumn(
        name=control.label,
        label=control.label,
        symbol="",
        unit=kind.si_unit or "1",
        units=kind.units if kind.si_unit else ("1",),
        formula="as set",
    )
