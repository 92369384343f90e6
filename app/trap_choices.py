"""What a user says of the trap: its frequencies, or the beams, coils and gravity that it is made of.

`BEAM_FIELDS` and `COILS_FIELDS` list the keys of a beam and of the coils once: loader, saving and forms read them.
"""

from __future__ import annotations

import itertools
import string
from collections.abc import Collection, Iterator, Sequence
from dataclasses import dataclass, replace
from enum import Enum
from types import MappingProxyType

from app.plan_field import Entry, PlanError, PlanField
from app.units import (
    BEAM_POWER,
    BEAM_QUALITY,
    BEAM_WAIST,
    BIAS_FIELD,
    FIELD_CURVATURE,
    FIELD_GRADIENT,
    POSITION,
    RADIO_FREQUENCY,
    WAVELENGTH,
    Quantity,
)

Direction = tuple[float, float, float]
"""Three numbers that are not all zero; only their ratios count."""

Place = tuple[Quantity, Quantity, Quantity]
"""A point of the laboratory [m]."""

DOWN: Direction = (0.0, 0.0, -1.0)
ALONG_Z: Direction = (0.0, 0.0, 1.0)
ORIGIN: Place = (Quantity("0 µm", 0.0), Quantity("0 µm", 0.0), Quantity("0 µm", 0.0))

LONGEST_NAME = 40
SMALLEST, LARGEST = 1e-6, 1e6  # of the largest component of a direction


class Gravity(Enum):
    """Gravity where it has no direction."""

    OFF = "off"


@dataclass(frozen=True, kw_only=True)
class BeamChoice:
    """A focused laser beam.

    name : different from that of every other beam
    wavelength : [m] in vacuum
    power : [W]
    waists : [m] 1/e^2 radii of the intensity: one of a round beam, else horizontal and vertical
    direction : along which the light travels
    focus : [m]
    on : a beam that is off does nothing
    m2 : beam quality, from 1; None: that of an ideal beam
    """

    name: str
    wavelength: Quantity
    power: Quantity
    waists: tuple[Quantity, ...]
    direction: Direction
    focus: Place = ORIGIN
    on: bool = True
    m2: Quantity | None = None

    def __post_init__(self) -> None:
        require_name(self.name)
        if len(self.waists) not in (1, 2):
            raise PlanError(f"a beam has one waist, or two, got {len(self.waists)}", path="trap.beam.waists")
        require_direction(self.direction)
        _require_place(self.focus)


@dataclass(frozen=True, kw_only=True)
class CoilsChoice:
    """Magnetic coils around a centre; None: without that part.

    axis : of bias and curvature, and the strong one of a quadrupole
    centre : [m]
    bias, gradient, curvature : [T], [T/m], [T/m^2]
    levitation : [T/m] gradient along gravity, the same everywhere
    knife : [Hz] radio frequency
    """

    axis: Direction = ALONG_Z
    centre: Place = ORIGIN
    bias: Quantity | None = None
    gradient: Quantity | None = None
    curvature: Quantity | None = None
    levitation: Quantity | None = None
    knife: Quantity | None = None

    def __post_init__(self) -> None:
        require_direction(self.axis)
        _require_place(self.centre)
        if all(getattr(self, name) is None for name in MAGNETIC_PARTS):
            raise PlanError(f"coils need at least one of {', '.join(MAGNETIC_PARTS)}", path="trap.coils")


MAGNETIC_PARTS = ("bias", "gradient", "curvature", "levitation")


@dataclass(frozen=True, kw_only=True)
class TrapChoice:
    """A trap by its ordinary frequencies along three axes [Hz], with its depth [J] if known; or else by beams, coils
    and gravity, from which frequencies and depth follow.

    gravity : None: as usual, along -z; it does not count where frequencies are given
    """

    frequencies: tuple[Quantity, Quantity, Quantity] | None = None
    depth: Quantity | None = None
    gravity: Direction | Gravity | None = None
    beams: tuple[BeamChoice, ...] = ()
    coils: CoilsChoice | None = None

    def __post_init__(self) -> None:
        made = bool(self.beams) or self.coils is not None
        if self.frequencies is None and not made:
            raise PlanError("a trap needs frequencies, or else beams or coils", path="trap.frequencies")
        if self.frequencies is not None and made:
            raise PlanError("a trap has frequencies, or else beams and coils, not both", path="trap.frequencies")
        if self.frequencies is not None and len(self.frequencies) != 3:
            raise PlanError(f"frequencies must be three, got {len(self.frequencies)}", path="trap.frequencies")
        if self.depth is not None and made:
            raise PlanError(
                "a depth goes with trap frequencies; that of beams and coils follows from them", path="trap.depth"
            )
        if isinstance(self.gravity, tuple):
            require_direction(self.gravity)
        require_different([beam.name for beam in self.beams])
        if self.coils is not None and self.coils.levitation is not None and self.gravity_direction is None:
            raise PlanError("the coils levitate along gravity, so it cannot be off", path="trap.gravity")

    @property
    def harmonic(self) -> bool:
        """Whether the trap is given by its frequencies."""
        return self.frequencies is not None

    @property
    def gravity_direction(self) -> Direction | None:
        """Along which atoms fall; None: gravity is off."""
        if isinstance(self.gravity, Gravity):
            return None
        return DOWN if self.gravity is None else self.gravity

    @property
    def makers(self) -> str:
        """What the trap is made of, in words: "beams A and B and coils"."""
        names = [beam.name for beam in self.beams]
        listed = " and ".join([", ".join(names[:-1]), names[-1]] if len(names) > 1 else names)
        parts = [f"beam{'s' if len(names) > 1 else ''} {listed}"] if names else []
        return " and ".join([*parts, *(["coils"] if self.coils is not None else [])])

    def beam(self, name: str) -> BeamChoice:
        """The beam of that name; PlanError with the names that there are."""
        for beam in self.beams:
            if beam.name == name:
                return beam
        there = ", ".join(beam.name for beam in self.beams) or "none"
        raise PlanError(f'the trap has no beam "{name}"; its beams: {there}')

    def with_beam(self, name: str, changed: BeamChoice) -> TrapChoice:
        """The trap with another beam in the place of the one of that name."""
        old = self.beam(name)
        return replace(self, beams=tuple(changed if beam is old else beam for beam in self.beams))


def require_name(name: str) -> None:
    """A name of a beam must be fit to be read and typed."""
    if not name or name != name.strip() or not name.isprintable() or len(name) > LONGEST_NAME:
        raise PlanError(
            f"a beam's name must be one line of 1 to {LONGEST_NAME} characters, without spaces around it",
            path="trap.beam.name",
        )


def require_different(names: Sequence[str]) -> None:
    """Beams must have different names."""
    seen: set[str] = set()
    for name in names:
        if name in seen:
            raise PlanError(f'two beams are named "{name}": each needs a name of its own', path="trap.beam.name")
        seen.add(name)


def require_direction(direction: Direction) -> None:
    """A direction must be three numbers of sensible size, not all zero."""
    if len(direction) != 3 or not all(abs(part) <= LARGEST for part in direction):
        raise PlanError(f"a direction must be three numbers from -{LARGEST:g} to {LARGEST:g}")
    if max(abs(part) for part in direction) < SMALLEST:
        raise PlanError("a direction must not be zero in all three numbers")


def _require_place(place: Place) -> None:
    if len(place) != 3:
        raise PlanError(f"a place must be three lengths, got {len(place)}")


def free_names(taken: Collection[str]) -> Iterator[str]:
    """A, B, ..., Z, AA, AB, ... without those that are taken: what beams without a name are called, in order."""
    letters = string.ascii_uppercase
    words = ("".join(word) for size in itertools.count(1) for word in itertools.product(letters, repeat=size))
    return (word for word in words if word not in taken)


BEAMS, COILS = "trap.beam", "trap.coils"
"""Sections of the file that hold them."""

_BEAM_FIELDS = (
    PlanField(
        path="trap.beam.name",
        label="Name",
        entry=Entry.NAME,
        tip="Different from the names of the other beams; A, B and so on where none is given.",
    ),
    PlanField(path="trap.beam.on", label="On", entry=Entry.SWITCH, tip="A beam that is off keeps its settings."),
    PlanField(
        path="trap.beam.wavelength",
        label="Wavelength",
        entry=Entry.QUANTITY,
        kind=WAVELENGTH,
        tip="Vacuum wavelength of the light.",
        required=True,
    ),
    PlanField(
        path="trap.beam.power",
        label="Power",
        entry=Entry.QUANTITY,
        kind=BEAM_POWER,
        tip="Power of the light that reaches the atoms.",
        required=True,
    ),
    PlanField(
        path="trap.beam.waist",
        label="Waist",
        entry=Entry.QUANTITY,
        kind=BEAM_WAIST,
        tip="1/e² radius of the intensity at the focus of a round beam.",
    ),
    PlanField(
        path="trap.beam.waists",
        label="Waists",
        entry=Entry.TWO,
        kind=BEAM_WAIST,
        tip="1/e² radii at the focus, horizontal and vertical: vertical is the transverse axis nearest z.",
    ),
    PlanField(
        path="trap.beam.direction",
        label="Direction",
        entry=Entry.DIRECTION,
        tip="Three numbers along which the light travels; only their ratios count.",
        required=True,
    ),
    PlanField(
        path="trap.beam.focus", label="Focus", entry=Entry.PLACE, kind=POSITION, tip="Where the beam is narrowest."
    ),
    PlanField(
        path="trap.beam.m2",
        label="Beam quality M²",
        entry=Entry.QUANTITY,
        kind=BEAM_QUALITY,
        tip="1 for an ideal beam, else larger: the Rayleigh length is shorter by it.",
    ),
)

_COILS_FIELDS = (
    PlanField(
        path="trap.coils.axis",
        label="Axis",
        entry=Entry.DIRECTION,
        tip="Direction of the bias and of the strong axis of a quadrupole; along z where none is given.",
    ),
    PlanField(
        path="trap.coils.centre",
        label="Centre",
        entry=Entry.PLACE,
        kind=POSITION,
        tip="Where the field of the coils has its centre.",
    ),
    PlanField(
        path="trap.coils.bias",
        label="Bias",
        entry=Entry.QUANTITY,
        kind=BIAS_FIELD,
        tip="Homogeneous field along the axis.",
    ),
    PlanField(
        path="trap.coils.gradient",
        label="Gradient",
        entry=Entry.QUANTITY,
        kind=FIELD_GRADIENT,
        tip="Radial with a bias or a curvature; alone, that of a quadrupole along its strong axis.",
    ),
    PlanField(
        path="trap.coils.curvature",
        label="Curvature",
        entry=Entry.QUANTITY,
        kind=FIELD_CURVATURE,
        tip="Second derivative of the field along the axis.",
    ),
    PlanField(
        path="trap.coils.levitation",
        label="Levitation",
        entry=Entry.QUANTITY,
        kind=FIELD_GRADIENT,
        tip="Gradient along gravity, the same everywhere, that holds the atoms up.",
    ),
    PlanField(
        path="trap.coils.knife",
        label="Radio-frequency knife",
        entry=Entry.QUANTITY,
        kind=RADIO_FREQUENCY,
        tip="Frequency at which atoms are taken out where it meets their Zeeman splitting.",
    ),
)

BEAM_FIELDS = MappingProxyType({field.name: field for field in _BEAM_FIELDS})
"""Key of a beam -> field, in the order of the file."""

COILS_FIELDS = MappingProxyType({field.name: field for field in _COILS_FIELDS})
"""Key of the coils -> field, in the order of the file."""
