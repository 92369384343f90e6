"""What a user says of other species: candidates to be compared, and a passenger in the same trap."""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum
from typing import TYPE_CHECKING

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


@dataclass(frozen=True, kw_only=True)
class CandidateChoice:
    """One species and state to be compared; what is None is as the plan's cloud or the data have it."""

    key: str
    state: str | None = None
    atoms: Quantity | None = None
    temperature: Quantity | None = None
    field: Quantity | None = None
    scattering_length: Quantity | None = None

    def __post_init__(self) -> None:
        if self.scattering_length is not None and self.field is not None:
            raise PlanError(
                "give either a scattering length or a magnetic field, not both", path="candidate.scattering_length"
            )


@dataclass(frozen=True, kw_only=True)
class CandidatesChoice:
    """Which species are compared, and in what.

    basis : None: the usual one, see `basis_of`
    keys : species, each in all of its states; with no keys and no candidates, all that there are
    candidates : single states with conditions of their own
    start : what a same start is
    """

    basis: Basis | None = None
    start: Start = Start.ATOMS_AND_TEMPERATURE
    keys: tuple[str, ...] = ()
    candidates: tuple[CandidateChoice, ...] = ()


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
