"""What a user says of other species: candidates to be compared, and a passenger in the same trap."""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum
from typing import TYPE_CHECKING, Protocol

from app.plan_field import PlanError
from app.units import Quantity

if TYPE_CHECKING:
    from app.choices import CloudChoice, SpeciesChoice
    from app.plan import Plan


class Basis(Enum):
    """In what candidates are judged.

    SAME_FREQUENCIES: each in a harmonic trap of the plan's frequencies and depth.
    SAME_LIGHT: each in the plan's beams and coils, which are another trap to each.
    SAME_START: each in the plan's trap, whichever way it is given, and all begin alike, see `Start`.
    """

    SAME_FREQUENCIES = "same frequencies"
    SAME_LIGHT = "same light"
    SAME_START = "same start"


class Start(Enum):
    """What is alike where candidates start alike.

    PHASE_SPACE_DENSITY: N (hbar wbar/kT)^3, which says how far from degeneracy a cloud begins; the temperature follows.
    """

    ATOMS_AND_TEMPERATURE = "same atoms and temperature"
    PHASE_SPACE_DENSITY = "same phase-space density"


@dataclass(frozen=True)
class FieldWish:
    """A magnetic field that is to be found between two: where the scattering length is the wanted one, or without one
    where elastic collisions outnumber losses most, three-body loss taken as fast as theory allows."""

    lowest: Quantity
    highest: Quantity
    length: Quantity | None = None


class Wishing(Protocol):
    """What may ask for a field."""

    @property
    def lowest_field(self) -> Quantity | None: ...
    @property
    def highest_field(self) -> Quantity | None: ...
    @property
    def wanted_length(self) -> Quantity | None: ...


def wish_of(choice: Wishing, section: str) -> FieldWish | None:
    """The field that is asked for; None where none is. Raises PlanError for half a wish."""
    low, high = choice.lowest_field, choice.highest_field
    if low is None or high is None:
        if low is not None or high is not None:
            missing = "lowest_field" if low is None else "highest_field"
            raise PlanError("a field is sought between two: give both ends of the range", path=f"{section}.{missing}")
        if choice.wanted_length is not None:
            raise PlanError(
                "a wanted scattering length needs the fields between which it is sought",
                path=f"{section}.wanted_length",
            )
        return None
    if not low.value < high.value:
        raise PlanError(
            f"the lowest field must be below the highest, got {low.text} and {high.text}",
            path=f"{section}.lowest_field",
        )
    return FieldWish(low, high, choice.wanted_length)


@dataclass(frozen=True, kw_only=True)
class CandidateChoice:
    """One species and state to be compared; what is None is as the plan's cloud or the data have it.

    lowest_field, highest_field, wanted_length : a field that is sought, see `FieldWish`
    """

    key: str
    state: str | None = None
    atoms: Quantity | None = None
    temperature: Quantity | None = None
    field: Quantity | None = None
    scattering_length: Quantity | None = None
    lowest_field: Quantity | None = None
    highest_field: Quantity | None = None
    wanted_length: Quantity | None = None

    def __post_init__(self) -> None:
        if self.scattering_length is not None and self.field is not None:
            raise PlanError(
                "give either a scattering length or a magnetic field, not both", path="candidate.scattering_length"
            )
        wish = wish_of(self, "candidate")
        if wish is not None and (self.scattering_length is not None or self.field is not None):
            raise PlanError(
                "a field is sought between the lowest and the highest one: give no magnetic field or scattering length",
                path="candidate.lowest_field",
            )


@dataclass(frozen=True, kw_only=True)
class CandidatesChoice:
    """Which species are compared, and in what.

    basis : None: the usual one, see `basis_of`
    keys : species, each in all of its states; with no keys and no candidates, all that there are
    candidates : single states with conditions of their own
    start : what a same start is
    lowest_field, highest_field, wanted_length : a field that is sought for each state that a field tunes, see
        `FieldWish`; a candidate with a field, a length or a wish of its own keeps that
    """

    basis: Basis | None = None
    start: Start = Start.ATOMS_AND_TEMPERATURE
    keys: tuple[str, ...] = ()
    candidates: tuple[CandidateChoice, ...] = ()
    lowest_field: Quantity | None = None
    highest_field: Quantity | None = None
    wanted_length: Quantity | None = None

    def __post_init__(self) -> None:
        wish_of(self, "candidates")


def basis_of(plan: Plan) -> Basis:
    """In what the candidates of a plan are judged: as it says, or else in its light, or in its frequencies where those
    are all that is known of its trap."""
    if plan.candidates.basis is not None:
        return plan.candidates.basis
    return Basis.SAME_FREQUENCIES if plan.trap.harmonic else Basis.SAME_LIGHT


@dataclass(frozen=True, kw_only=True)
class PassengerChoice:
    """A second species, or spin state, in the same trap.

    scattering_length : [m] between the two species; None: as the data have it
    frequencies, depth : [Hz] [J] of the trap as these atoms see it, where that is given by its frequencies; None: those
        of the first species
    """

    species: SpeciesChoice
    cloud: CloudChoice
    scattering_length: Quantity | None = None
    frequencies: tuple[Quantity, Quantity, Quantity] | None = None
    depth: Quantity | None = None
