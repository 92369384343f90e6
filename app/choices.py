"""The Plan: all that a user decides, frozen, with the text of every quantity as it was written.

`PLAN_FIELDS` lists its keys once: the loader, the command-line flags and the forms all read this table.
"""

from __future__ import annotations

from dataclasses import dataclass, field
from types import MappingProxyType
from typing import TYPE_CHECKING

from app.candidate_choices import CandidatesChoice, PassengerChoice
from app.plan_field import Entry, PlanError, PlanField
from app.ramp_choices import LimitsChoice, MeasuredChoice, StageChoice
from app.trap_choices import TrapChoice
from app.units import (
    ATOM_NUMBER,
    DEPTH,
    EFFICIENCY,
    FREQUENCY,
    HEATING_RATE,
    INTENSITY_NOISE,
    LIFETIME,
    MAGNETIC_FIELD,
    PHASE_SPACE_DENSITY,
    POINTING_NOISE,
    REDUCED_TEMPERATURE,
    SCATTERING_LENGTH,
    TEMPERATURE,
    THREE_BODY_RATE,
    TWO_BODY_RATE,
    Quantity,
)

if TYPE_CHECKING:
    from physics.cloud import Model


MOST_SPIN_STATES = 20
LONGEST_TITLE = 200


@dataclass(frozen=True, kw_only=True)
class SpeciesChoice:
    """Which atoms. `scattering_length` and `field` (through the resonances) each override the data; not both.

    key : name of the preset, such as "87Rb"
    state : name of one of its states; None: the first
    spin_components : equally filled spin states; None: as the state has it
    """

    key: str = "87Rb"
    state: str | None = None
    spin_components: int | None = None
    scattering_length: Quantity | None = None
    field: Quantity | None = None

    def __post_init__(self) -> None:
        if self.scattering_length is not None and self.field is not None:
            raise PlanError("give either a scattering length or a magnetic field, not both")
        if self.spin_components is not None and not 1 <= self.spin_components <= MOST_SPIN_STATES:
            raise PlanError(f"spin_components must be from 1 to {MOST_SPIN_STATES}, got {self.spin_components}")


@dataclass(frozen=True, kw_only=True)
class CloudChoice:
    """Atoms per spin state, temperature [K], and the model; None: the usual one of the statistics."""

    atoms: Quantity
    temperature: Quantity
    model: Model | None = None


@dataclass(frozen=True, kw_only=True)
class LossesChoice:
    """What takes atoms away or heats them; None: as the data have it, or unknown.

    background_lifetime : [s] 1/e, of collisions with the background gas
    two_body, three_body : [m^3/s], [m^6/s] K of a thermal gas
    heating : [K/s] that does not depend on density; None: what the trap's own light brings
    intensity_noise : [1/Hz] one-sided, fractional, at twice the trap frequencies
    pointing_noise : [m^2/Hz] one-sided, of the position of the trap along each axis, at the trap frequencies
    """

    background_lifetime: Quantity | None = None
    two_body: Quantity | None = None
    three_body: Quantity | None = None
    heating: Quantity | None = None
    intensity_noise: Quantity | None = None
    pointing_noise: Quantity | None = None


@dataclass(frozen=True, kw_only=True)
class TargetChoice:
    """What counts as reached: at most one of the first three; and an assumed efficiency of evaporation."""

    reduced_temperature: Quantity | None = None
    peak_phase_space_density: Quantity | None = None
    condensate_atoms: Quantity | None = None
    efficiency: Quantity | None = None

    def __post_init__(self) -> None:
        named = [name for name in TARGETS if getattr(self, name) is not None]
        if len(named) > 1:
            raise PlanError(f"a target is one of {', '.join(TARGETS)}; got {' and '.join(named)}")


TARGETS = ("reduced_temperature", "peak_phase_space_density", "condensate_atoms")


@dataclass(frozen=True, kw_only=True)
class Plan:
    """One cloud in one trap, and what it is wanted for.

    ramp : stages of the evaporation, in order
    limits : what a designed ramp keeps
    measured : clouds measured on the way
    candidates : other species to be compared
    passenger : a second species in the trap
    unused : beams and coils of its file that do not count beside trap frequencies
    source : text of the file it came from, so that saving keeps comments, layout and unused sections; it does not
        count when plans are compared
    """

    title: str = ""
    species: SpeciesChoice
    trap: TrapChoice
    cloud: CloudChoice
    losses: LossesChoice = LossesChoice()
    target: TargetChoice = TargetChoice()
    ramp: tuple[StageChoice, ...] = ()
    limits: LimitsChoice = field(default_factory=LimitsChoice)
    measured: tuple[MeasuredChoice, ...] = ()
    candidates: CandidatesChoice = field(default_factory=CandidatesChoice)
    passenger: PassengerChoice | None = None
    unused: tuple[str, ...] = ()
    source: str = field(default="", compare=False, repr=False)

    def __post_init__(self) -> None:
        if len(self.title) > LONGEST_TITLE or not self.title.isprintable():
            raise PlanError(f"title must be one line of at most {LONGEST_TITLE} characters")


def _other_targets(name: str) -> tuple[str, ...]:
    return tuple(f"target.{other}" for other in TARGETS if other != name)


_FIELDS = (
    PlanField(
        path="title", label="Title", entry=Entry.TEXT, flag="--title", tip="A line of your own that names the plan."
    ),
    PlanField(
        path="species.key",
        label="Species",
        entry=Entry.SPECIES,
        flag="--species",
        tip="Isotope. Its mass, statistics and scattering data come from the presets, each with its source.",
        required=True,
        # What was said about another species' states and collisions does not carry over.
        excludes=(
            "species.state",
            "species.spin_components",
            "species.scattering_length",
            "species.field",
            "losses.two_body",
            "losses.three_body",
        ),
    ),
    PlanField(
        path="species.state",
        label="State",
        entry=Entry.STATE,
        flag="--state",
        tip="Internal state in which the atoms are trapped. Case and spaces do not matter.",
    ),
    PlanField(
        path="species.spin_components",
        label="Spin states",
        entry=Entry.WHOLE,
        flag="--spin-components",
        tip="Number of equally filled spin states: 1 polarised, 2 for a balanced Fermi mixture.",
    ),
    PlanField(
        path="species.scattering_length",
        label="Scattering length",
        entry=Entry.QUANTITY,
        kind=SCATTERING_LENGTH,
        flag="--scattering-length",
        tip="s-wave scattering length; overrides the data. Negative is attractive.",
        excludes=("species.field",),
    ),
    PlanField(
        path="species.field",
        label="Magnetic field",
        entry=Entry.QUANTITY,
        kind=MAGNETIC_FIELD,
        flag="--field",
        tip="Homogeneous field; the scattering length follows from the state's resonances.",
        excludes=("species.scattering_length",),
    ),
    PlanField(
        path="trap.frequencies",
        label="Trap frequencies",
        entry=Entry.FREQUENCIES,
        kind=FREQUENCY,
        flag="--frequencies",
        tip="Ordinary frequencies along the three axes, in Hz: ω/2π. 2π×120 Hz is read as 120 Hz. They "
        "replace beams and coils.",
        required=True,
    ),
    PlanField(
        path="trap.depth",
        label="Trap depth",
        entry=Entry.QUANTITY,
        kind=DEPTH,
        flag="--depth",
        tip="Energy from the bottom to the lowest way out, as a temperature, a frequency or an energy.",
    ),
    PlanField(
        path="trap.gravity",
        label="Gravity",
        entry=Entry.GRAVITY,
        flag="--gravity",
        tip='Direction in which atoms fall, such as "0, 0, -1", or "off"; trap frequencies hold its effect already.',
    ),
    PlanField(
        path="cloud.atoms",
        label="Atoms",
        entry=Entry.QUANTITY,
        kind=ATOM_NUMBER,
        flag="--atoms",
        tip="Atom number per spin state, condensate included.",
        required=True,
    ),
    PlanField(
        path="cloud.temperature",
        label="Temperature",
        entry=Entry.QUANTITY,
        kind=TEMPERATURE,
        flag="--temperature",
        tip="Also as an energy over k, or as a frequency times h/k: 4.2 kHz is 202 nK.",
        required=True,
    ),
    PlanField(
        path="cloud.model",
        label="Model",
        entry=Entry.MODEL,
        flag="--model",
        tip="Description of the gas; by default semi-ideal for bosons and ideal for fermions.",
    ),
    PlanField(
        path="losses.background_lifetime",
        label="Background lifetime",
        entry=Entry.QUANTITY,
        kind=LIFETIME,
        flag="--background-lifetime",
        tip="1/e lifetime of the atoms by collisions with the background gas.",
    ),
    PlanField(
        path="losses.two_body",
        label="Two-body loss K₂",
        entry=Entry.QUANTITY,
        kind=TWO_BODY_RATE,
        flag="--two-body",
        tip="dn/dt = −K₂ n² of a thermal gas, n of one spin state; overrides the data. A condensate loses half of it.",
    ),
    PlanField(
        path="losses.three_body",
        label="Three-body loss K₃",
        entry=Entry.QUANTITY,
        kind=THREE_BODY_RATE,
        flag="--three-body",
        tip="dn/dt = −K₃ n³ of a thermal gas; overrides the data. A condensate loses one sixth of it.",
    ),
    PlanField(
        path="losses.heating",
        label="Heating",
        entry=Entry.QUANTITY,
        kind=HEATING_RATE,
        flag="--heating",
        tip="Rise of temperature per time by whatever does not depend on density; overrides that by the trap's light.",
    ),
    PlanField(
        path="losses.intensity_noise",
        label="Intensity noise",
        entry=Entry.QUANTITY,
        kind=INTENSITY_NOISE,
        flag="--intensity-noise",
        tip="One-sided spectrum of the light's relative intensity at twice the trap frequencies; it heats the cloud.",
    ),
    PlanField(
        path="losses.pointing_noise",
        label="Pointing noise",
        entry=Entry.QUANTITY,
        kind=POINTING_NOISE,
        flag="--pointing-noise",
        tip="One-sided spectrum of the trap's position along each axis, at the trap frequencies; it heats the cloud.",
    ),
    PlanField(
        path="target.reduced_temperature",
        label="Target T/Tc or T/TF",
        entry=Entry.QUANTITY,
        kind=REDUCED_TEMPERATURE,
        flag="--target-reduced-temperature",
        tip="Temperature over the critical (bosons) or the Fermi temperature that counts as reached.",
        excludes=_other_targets("reduced_temperature"),
    ),
    PlanField(
        path="target.peak_phase_space_density",
        label="Target phase-space density",
        entry=Entry.QUANTITY,
        kind=PHASE_SPACE_DENSITY,
        flag="--target-phase-space-density",
        tip="Peak phase-space density that counts as reached.",
        excludes=_other_targets("peak_phase_space_density"),
    ),
    PlanField(
        path="target.condensate_atoms",
        label="Target condensate atoms",
        entry=Entry.QUANTITY,
        kind=ATOM_NUMBER,
        flag="--target-condensate-atoms",
        tip="Number of atoms in the condensate that counts as reached.",
        excludes=_other_targets("condensate_atoms"),
    ),
    PlanField(
        path="target.efficiency",
        label="Evaporation efficiency",
        entry=Entry.QUANTITY,
        kind=EFFICIENCY,
        flag="--efficiency",
        tip="Assumed −d ln D/d ln N: orders of magnitude gained in phase-space density for each one lost in atoms.",
    ),
)

PLAN_FIELDS = MappingProxyType({field.path: field for field in _FIELDS})
"""Dotted path -> field, in the order of the file."""

DEFAULT_PLAN = Plan(
    title="Rubidium in a cigar-shaped trap",
    species=SpeciesChoice(key="87Rb", state="F=1 mF=-1"),
    trap=TrapChoice(
        frequencies=(Quantity("120 Hz", 120.0), Quantity("120 Hz", 120.0), Quantity("20 Hz", 20.0)),
    ),
    cloud=CloudChoice(atoms=Quantity("1.0(1)e5", 1e5, 1e4), temperature=Quantity("200(10) nK", 2e-7, 1e-8)),
    target=TargetChoice(efficiency=Quantity("2.5", 2.5)),
)
"""What a window without a file shows. The values stand beside the texts so that starting reads no text; a test reads
them."""
