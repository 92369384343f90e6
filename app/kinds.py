"""What sort of quantity a text can be: its units, its spellings, its possible values.

`EVERYDAY` lists the units that people type every day, with their SI factors, so that the usual input is read without
loading the unit registry; a test holds every row against the registry.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from decimal import Context, Decimal
from types import MappingProxyType

from physics.constants import bohr_magneton, bohr_radius, boltzmann, elementary_charge, planck

_WIDE = Context(prec=60)
_H = Decimal(repr(planck))
_K = Decimal(repr(boltzmann))
_E = Decimal(repr(elementary_charge))

# SI unit -> ((unit, factor), ...); the micro sign is U+00B5 throughout
_BY_SI_UNIT: Mapping[str, tuple[tuple[str, str | Decimal], ...]] = {
    "": (("", "1"), ("1", "1"), ("%", "0.01")),
    "K": (("pK", "1e-12"), ("nK", "1e-9"), ("µK", "1e-6"), ("mK", "1e-3"), ("K", "1")),
    "Hz": (("mHz", "1e-3"), ("Hz", "1"), ("kHz", "1e3"), ("MHz", "1e6")),
    "m": (("a0", repr(bohr_radius)), ("nm", "1e-9"), ("µm", "1e-6"), ("mm", "1e-3"), ("cm", "1e-2"), ("m", "1")),
    "s": (("µs", "1e-6"), ("ms", "1e-3"), ("s", "1")),
    "T": (("mG", "1e-7"), ("G", "1e-4"), ("µT", "1e-6"), ("mT", "1e-3"), ("T", "1")),
    "J": (("peV", _E.scaleb(-12)), ("neV", _E.scaleb(-9)), ("µeV", _E.scaleb(-6)), ("eV", _E), ("J", "1")),
    "J/T": (("muB", repr(bohr_magneton)), ("J/T", "1")),
    "K/s": (("nK/s", "1e-9"), ("µK/s", "1e-6"), ("K/s", "1")),
    "J/s": (("J/s", "1"),),
    "Hz/s": (("Hz/s", "1"), ("kHz/s", "1e3"), ("MHz/s", "1e6")),
    "T/s": (("mG/s", "1e-7"), ("G/s", "1e-4"), ("T/s", "1")),
    "W": (("µW", "1e-6"), ("mW", "1e-3"), ("W", "1")),
    "W/s": (("mW/s", "1e-3"), ("W/s", "1")),
    "T/m": (("G/cm", "1e-2"), ("T/m", "1")),
    "T/m/s": (("G/cm/s", "1e-2"), ("T/m/s", "1")),
    "T/m^2": (("G/cm^2", "1"), ("T/m^2", "1")),
    "T/m^2/s": (("G/cm^2/s", "1"), ("T/m^2/s", "1")),
    "1/s": (("1/s", "1"),),
    "1/Hz": (("1/Hz", "1"),),
    "m^2/Hz": (("nm^2/Hz", "1e-18"), ("µm^2/Hz", "1e-12"), ("m^2/Hz", "1")),
    "m^2": (("m^2", "1"), ("cm^2", "1e-4")),
    "1/m": (("1/m", "1"), ("1/µm", "1e6")),
    "1/m^2": (("1/m^2", "1"), ("1/cm^2", "1e4"), ("cm^-2", "1e4"), ("1/µm^2", "1e12")),
    "1/m^3": (("1/m^3", "1"), ("1/cm^3", "1e6"), ("cm^-3", "1e6"), ("1/µm^3", "1e18")),
    "m^3/s": (("m^3/s", "1"), ("cm^3/s", "1e-6")),
    "m^6/s": (("m^6/s", "1"), ("cm^6/s", "1e-12")),
}

EVERYDAY: Mapping[str, tuple[Decimal, str]] = MappingProxyType(
    {unit: (Decimal(size), si_unit) for si_unit, rows in _BY_SI_UNIT.items() for unit, size in rows}
)
"""Unit text -> (exact SI factor, SI unit)."""

STAND_INS: Mapping[str, tuple[tuple[str, Decimal], ...]] = MappingProxyType(
    {
        "K": (("J", _WIDE.divide(Decimal(1), _K)), ("Hz", _WIDE.divide(_H, _K))),
        "J": (("K", _K), ("Hz", _H)),
        "J/s": (("K/s", _K), ("Hz/s", _H)),
    }
)
"""SI unit -> other SI units that stand for it, with factors: temperatures as energies over k or frequencies times
h/k, energies as temperatures or frequencies, and so per second."""


@dataclass(frozen=True, kw_only=True)
class Kind:
    """One sort of quantity.

    name : the word for it in a sentence, without article
    si_unit : unit of its SI value; empty for pure numbers
    units : units offered, the usual one first; every other unit of the same dimension is read too
    low, high : [si_unit] possible values, both included
    example : a text that is read; shown in messages
    """

    name: str
    si_unit: str
    units: tuple[str, ...]
    low: float
    high: float
    example: str

    def __post_init__(self) -> None:
        if not self.low < self.high:
            raise ValueError(f"{self.name} must run from a low to a high bound, got {self.low:g} to {self.high:g}")
        if not self.units:
            raise ValueError(f"{self.name} must offer a unit")


TEMPERATURE = Kind(
    name="temperature",
    si_unit="K",
    units=("nK", "µK", "mK", "K", "Hz", "kHz", "neV", "J"),
    low=1e-12,
    high=10.0,
    example="200 nK",
)
DEPTH = Kind(
    name="trap depth",
    si_unit="J",
    units=("µK", "nK", "mK", "kHz", "MHz", "neV", "J"),
    low=boltzmann * 1e-12,
    high=boltzmann * 10.0,
    example="5 µK",
)
FREQUENCY = Kind(name="trap frequency", si_unit="Hz", units=("Hz", "kHz", "MHz"), low=1e-3, high=1e8, example="120 Hz")
ATOM_NUMBER = Kind(name="atom number", si_unit="", units=("",), low=1.0, high=1e15, example="1.0e5")
SCATTERING_LENGTH = Kind(
    name="scattering length", si_unit="m", units=("a0", "nm"), low=-1e-4, high=1e-4, example="100.4 a0"
)
MAGNETIC_FIELD = Kind(
    name="magnetic field", si_unit="T", units=("G", "mG", "mT", "T"), low=0.0, high=10.0, example="155.2 G"
)
WAVELENGTH = Kind(name="wavelength", si_unit="m", units=("nm", "µm"), low=1e-7, high=1e-4, example="1064 nm")
BEAM_POWER = Kind(name="beam power", si_unit="W", units=("W", "mW", "µW"), low=0.0, high=1e5, example="2.5 W")
BEAM_WAIST = Kind(name="beam waist", si_unit="m", units=("µm", "mm"), low=1e-7, high=0.1, example="70 µm")
BEAM_QUALITY = Kind(name="beam quality", si_unit="", units=("",), low=1.0, high=1000.0, example="1.1")
POSITION = Kind(name="position", si_unit="m", units=("µm", "mm", "m"), low=-10.0, high=10.0, example="0 µm")
BIAS_FIELD = Kind(name="bias field", si_unit="T", units=("G", "mG", "mT", "T"), low=-10.0, high=10.0, example="1.5 G")
FIELD_GRADIENT = Kind(
    name="field gradient", si_unit="T/m", units=("G/cm", "T/m"), low=-1e5, high=1e5, example="30.5 G/cm"
)
FIELD_CURVATURE = Kind(
    name="field curvature", si_unit="T/m^2", units=("G/cm^2", "T/m^2"), low=-1e9, high=1e9, example="150 G/cm^2"
)
RADIO_FREQUENCY = Kind(
    name="radio frequency", si_unit="Hz", units=("MHz", "kHz", "Hz"), low=1.0, high=1e11, example="2.1 MHz"
)
DURATION = Kind(name="duration", si_unit="s", units=("s", "ms", "µs", "min"), low=1e-6, high=1e6, example="2 s")
TIME = Kind(name="time", si_unit="s", units=("s", "ms", "µs", "min"), low=0.0, high=1e6, example="1 s")
EXPONENT = Kind(name="exponent", si_unit="", units=("",), low=0.01, high=100.0, example="1.5")
CLOUD_WIDTH = Kind(name="width of the cloud", si_unit="m", units=("µm", "mm"), low=1e-8, high=1.0, example="85 µm")
DEPTH_SPEED = Kind(
    name="change of the depth per time",
    si_unit="J/s",
    units=("µK/s", "nK/s", "kHz/s", "MHz/s", "J/s"),
    low=boltzmann * 1e-15,
    high=boltzmann * 1e6,
    example="5 µK/s",
)
SCALE_SPEED = Kind(
    name="change of the scale per time", si_unit="1/s", units=("1/s",), low=1e-9, high=1e6, example="0.2 1/s"
)
POWER_SPEED = Kind(
    name="change of the power per time", si_unit="W/s", units=("W/s", "mW/s"), low=1e-12, high=1e9, example="0.1 W/s"
)
RADIO_FREQUENCY_SPEED = Kind(
    name="change of the radio frequency per time",
    si_unit="Hz/s",
    units=("MHz/s", "kHz/s", "Hz/s"),
    low=1e-3,
    high=1e15,
    example="0.5 MHz/s",
)
BIAS_FIELD_SPEED = Kind(
    name="change of the bias field per time",
    si_unit="T/s",
    units=("G/s", "mG/s", "T/s"),
    low=1e-15,
    high=1e6,
    example="1 G/s",
)
GRADIENT_SPEED = Kind(
    name="change of the gradient per time",
    si_unit="T/m/s",
    units=("G/cm/s", "T/m/s"),
    low=1e-12,
    high=1e9,
    example="10 G/cm/s",
)
CURVATURE_SPEED = Kind(
    name="change of the curvature per time",
    si_unit="T/m^2/s",
    units=("G/cm^2/s", "T/m^2/s"),
    low=1e-9,
    high=1e12,
    example="50 G/cm^2/s",
)
LIFETIME = Kind(name="lifetime", si_unit="s", units=("s", "ms", "min", "h"), low=1e-6, high=1e9, example="60 s")
TWO_BODY_RATE = Kind(
    name="two-body rate constant",
    si_unit="m^3/s",
    units=("cm^3/s", "m^3/s"),
    low=0.0,
    high=1e-9,
    example="1e-14 cm^3/s",
)
THREE_BODY_RATE = Kind(
    name="three-body rate constant",
    si_unit="m^6/s",
    units=("cm^6/s", "m^6/s"),
    low=0.0,
    high=1e-27,
    example="4e-29 cm^6/s",
)
HEATING_RATE = Kind(
    name="heating rate", si_unit="K/s", units=("nK/s", "µK/s", "K/s"), low=0.0, high=10.0, example="20 nK/s"
)
INTENSITY_NOISE = Kind(name="intensity noise", si_unit="1/Hz", units=("1/Hz",), low=0.0, high=1.0, example="1e-12 1/Hz")
POINTING_NOISE = Kind(
    name="pointing noise", si_unit="m^2/Hz", units=("nm^2/Hz", "m^2/Hz"), low=0.0, high=1e-6, example="1e-3 nm^2/Hz"
)
REDUCED_TEMPERATURE = Kind(name="reduced temperature", si_unit="", units=("",), low=1e-4, high=1e4, example="0.5")
PHASE_SPACE_DENSITY = Kind(name="phase-space density", si_unit="", units=("",), low=1e-15, high=1e6, example="2.612")
EFFICIENCY = Kind(name="evaporation efficiency", si_unit="", units=("",), low=0.01, high=100.0, example="2.5")
DIMENSIONLESS = Kind(name="number", si_unit="", units=("",), low=-1e300, high=1e300, example="1.5")
