"""The physics of trapped quantum gases: SI floats in, SI floats out, arrays where a number is meant.

Names are loaded on first use, so that asking for one function does not import the rest.
"""

from __future__ import annotations

from importlib import import_module
from typing import Any

_HOME = {
    "Statistics": "particles",
    "Certainty": "particles",
    "bose": "statistics",
    "bose_inverse": "statistics",
    "fermi": "statistics",
    "fermi_inverse": "statistics",
    "load_species": "species",
    "species_keys": "species",
    "Cloud": "cloud",
    "Model": "cloud",
    "equilibrium": "cloud",
    "HarmonicTrap": "traps",
    "Gas": "gas",
    "Losses": "losses",
    "Ramp": "ramps",
    "Stage": "ramps",
    "Move": "ramps",
    "Target": "evaporation_target",
    "evaporate": "evaporation",
    "Passenger": "passenger",
    "evaporate_with_passenger": "sympathetic",
    "length_between": "pair_scattering",
    "design_ramp": "ramp_design",
    "GaussianBeam": "traps",
    "Coils": "traps",
    "Gravity": "traps",
    "Trap": "traps",
    "survey": "traps.survey",
}

__all__ = sorted(_HOME)


def __getattr__(name: str) -> Any:
    home = _HOME.get(name)
    if home is None:
        raise AttributeError(f"module 'physics' has no attribute {name!r}")
    return getattr(import_module(f"physics.{home}"), name)


def __dir__() -> list[str]:
    return sorted([*globals(), *_HOME])
