"""Species and states side by side: each put into the plan, in the same frequencies, the same light, or from the same
start.

There is one way to answer for a cloud, `app.answers.cloud`; a candidate is the plan with another species in it.
"""

from __future__ import annotations

import math
import time
from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from app.answers.candidate_field import FieldSearch, field_search
from app.answers.candidate_row import CandidateRow, Failure, length_reason
from app.answers.candidate_thresholds import threshold_curve
from app.answers.candidate_trap import trap_facts
from app.answers.cloud import cloud_answer
from app.answers.inputs import cloud_of, values_of
from app.answers.part import part
from app.answers.trap import trap_answer
from app.answers.trap_inputs import surveyed_trap
from app.candidate_choices import Basis, CandidateChoice, FieldWish, Start, basis_of, wish_of
from app.candidate_columns import USUAL_COLUMNS
from app.choices import SpeciesChoice
from app.language import translate as _
from app.plan_field import PlanError
from app.trap_choices import TrapChoice
from app.units import Quantity, best_unit, format_quantity
from app.words import number
from physics.models import Model
from physics.scattering import LengthInUse, WhyUnknown, tuning
from physics.species import load_species, species_keys

if TYPE_CHECKING:
    from app.answers.cloud import CloudAnswer
    from app.plan import Plan

KEPT = 160
"""Rows that are kept: all states of the data, twice."""

NO_LENGTH = LengthInUse(value=None, reason=WhyUnknown.NOT_IN_DATA)
"""What a cloud without interaction is given."""

_MOST_STEPS = 60
_NEARLY_SATURATED = 2.6

PATIENCE = 0.3
"""Seconds between the first deliveries of the rows that are there."""

_HURRY = 3.0
"""Seconds after which deliveries come half as often, and so on: each takes the window time to show."""


@dataclass(frozen=True, kw_only=True, eq=False)
class CandidatesAnswer:
    """The candidates of a plan, so far as they are judged.

    expected : number of rows when all are
    """

    basis: Basis
    start: Start
    rows: tuple[CandidateRow, ...]
    expected: int

    @property
    def complete(self) -> bool:
        return len(self.rows) == self.expected


def candidates_of(plan: Plan) -> tuple[CandidateChoice, ...]:
    """The states to be compared, by mass number: those of the plan, or all of the data where it names none.

    Raises ValueError for a species or state that the data do not have.
    """
    choice = plan.candidates
    keys = choice.keys or (() if choice.candidates else species_keys())
    found = {}
    for key in keys:
        species = load_species(key)
        for state in species.states:
            found[species.key, state.name] = CandidateChoice(key=species.key, state=state.name)
    for own in choice.candidates:
        species = load_species(own.key)
        state = species.state(own.state)
        found[species.key, state.name] = replace(own, key=species.key, state=state.name)
    order = {key: place for place, key in enumerate(species_keys())}
    return tuple(sorted(found.values(), key=lambda candidate: order[candidate.key]))


def candidates_answer(
    plan: Plan,
    deliver: Callable[[CandidatesAnswer], bool] = lambda _answer: True,
    tick: Callable[[float], bool] = lambda _share: True,
) -> CandidatesAnswer | None:
    """Every candidate of the plan, judged in its basis.

    `deliver` is given the rows that are there from time to time, `tick` the share that is done; a false answer of
    either stops the work, and the result is None.

    Raises PlanError, in one sentence, where the basis cannot be had.
    """
    choice = plan.candidates
    frame = _frame(plan)
    candidates = candidates_of(plan)
    rows: list[CandidateRow] = []

    def answer() -> CandidatesAnswer:
        return CandidatesAnswer(basis=basis_of(plan), start=choice.start, rows=tuple(rows), expected=len(candidates))

    begun = last = time.monotonic()
    for candidate in candidates:
        put, search = _at_best_field(_plan_of(plan, candidate, frame), candidate)
        rows.append(_row(put, candidate, frame.in_light, search))
        _work_ahead(rows[-1])
        if not tick(len(rows) / len(candidates)):
            return None
        now = time.monotonic()
        if now - last > PATIENCE * (1.0 + (now - begun) / _HURRY) and len(rows) < len(candidates):
            if not deliver(answer()):
                return None
            last = now
    return answer()


def _work_ahead(row: CandidateRow) -> None:
    """Numbers that are worked out when they are first asked for, done here, where nobody waits for a window."""
    for name in USUAL_COLUMNS:
        row.cell(name)
    if row.cloud is not None:
        threshold_curve(row.plan)
    if row.failure is None:
        _ = row.warnings  # the table counts them


@dataclass(frozen=True, kw_only=True)
class _Frame:
    """What all candidates share: the trap, and where they start alike in phase-space density, that of the plan's own
    cloud [1]: the peak one, or of a condensed cloud, whose peak is flat, the classical one."""

    trap: TrapChoice
    in_light: bool
    density: float | None = None
    classical: bool = False


def _frame(plan: Plan) -> _Frame:
    basis, harmonic = basis_of(plan), plan.trap.harmonic
    if basis is Basis.SAME_LIGHT and harmonic:
        raise PlanError(
            "the same light needs a trap of beams or coils, and the trap of this plan is given by its frequencies",
            path="candidates.basis",
        )
    if basis is Basis.SAME_FREQUENCIES:
        return _Frame(trap=plan.trap if harmonic else _frequencies_of(plan), in_light=False)
    density = None
    if basis is Basis.SAME_START and plan.candidates.start is Start.PHASE_SPACE_DENSITY:
        own = cloud_answer(plan).equilibrium
        density = float(own.peak_phase_space_density)
        if density > _NEARLY_SATURATED and own.bosons:
            density = float(own.classical_phase_space_density)
            return _Frame(trap=plan.trap, in_light=not harmonic, density=density, classical=True)
    return _Frame(trap=plan.trap, in_light=not harmonic, density=density)


def _frequencies_of(plan: Plan) -> TrapChoice:
    """The harmonic trap that the plan's own atoms see in its beams and coils."""
    found = surveyed_trap(plan)
    frequencies = tuple(_exactly(float(value), "Hz") for value in found.frequencies)
    depth = None if found.depth is None else _exactly(float(found.depth), "µK", si_unit="J")
    return TrapChoice(frequencies=(frequencies[0], frequencies[1], frequencies[2]), depth=depth)


def _exactly(value: float, unit: str, *, si_unit: str | None = None) -> Quantity:
    """A number that was worked out, with all its digits; its text is only to be read."""
    return Quantity(format_quantity(value, unit, digits=4, si_unit=si_unit), value)


def _at_best_field(plan: Plan, candidate: CandidateChoice) -> tuple[Plan, FieldSearch | None]:
    """The plan of a candidate in the field that is sought for it, and the search; as it is where none is."""
    wish = _wish(plan, candidate)
    if wish is None or not trap_facts(plan).held:
        return plan, None
    without = replace(plan, species=replace(plan.species, field=None, scattering_length=None))
    try:
        search = field_search(without, wish)
    except (ValueError, ArithmeticError) as error:
        search = FieldSearch(wish=wish, reason=str(error))
    return replace(plan, species=replace(without.species, field=search.quantity)), search


def _wish(plan: Plan, candidate: CandidateChoice) -> FieldWish | None:
    """What field a candidate asks for: its own wish, else that of all where a field tunes it and it names none."""
    own = wish_of(candidate, "candidate")
    if own is not None or candidate.field is not None or candidate.scattering_length is not None:
        return own
    state = load_species(plan.species.key).state(plan.species.state)
    return wish_of(plan.candidates, "candidates") if tuning(state) else None


def _plan_of(plan: Plan, candidate: CandidateChoice, frame: _Frame) -> Plan:
    """The plan with the candidate in the place of its own species.

    A field of the laboratory, background gas, heating and noise stay; a typed scattering length and constants of
    two- and three-body loss hold for the plan's own atoms only.
    """
    own = load_species(plan.species.key).state(plan.species.state)
    same = (own.key, own.name) == (candidate.key, candidate.state)
    species, losses = plan.species, plan.losses
    if not same:
        species = SpeciesChoice(key=candidate.key, state=candidate.state, field=plan.species.field)
        losses = replace(losses, two_body=None, three_body=None)
    if candidate.field is not None or candidate.scattering_length is not None:
        species = replace(species, field=candidate.field, scattering_length=candidate.scattering_length)
    put = replace(plan, species=species, losses=losses, trap=frame.trap)
    same_cloud = basis_of(plan) is Basis.SAME_START and frame.density is None
    atoms = plan.cloud.atoms if same_cloud else candidate.atoms or plan.cloud.atoms
    temperature = plan.cloud.temperature if same_cloud else candidate.temperature or plan.cloud.temperature
    put = replace(put, cloud=replace(plan.cloud, atoms=atoms, temperature=temperature))
    if frame.density is None or not trap_facts(put).held:
        return put
    value = _temperature_at(put, frame.density, frame.classical)
    temperature = _exactly(value, best_unit(value, ("nK", "µK", "mK")))
    return replace(put, cloud=replace(put.cloud, temperature=temperature))


@part("species", "trap", "cloud.atoms", keep=KEPT)
def _temperature_at(plan: Plan, density: float, classical: bool) -> float:
    """The temperature [K] at which the plan's cloud has this phase-space density, in a trap that holds it."""
    from physics.cloud import equilibrium

    cloud = cloud_of(plan, load_species(plan.species.key).state(plan.species.state), NO_LENGTH, values_of(plan))

    def miss(log_temperature: float) -> float:
        solved = equilibrium(replace(cloud, temperature=math.exp(log_temperature)), Model.IDEAL)
        found = solved.classical_phase_space_density if classical else solved.peak_phase_space_density
        return math.log(float(found) / density)

    # ln D falls by 3 for each unit of ln T of a classical cloud in a harmonic trap, by less near the rim of a real one
    # and not at all where a condensate has formed.
    here = math.log(plan.cloud.temperature.value)
    value, slope = miss(here), -3.0
    for _step in range(_MOST_STEPS):
        step = max(-1.5, min(1.5, -value / slope))
        there = miss(here + step)
        if abs(step) < 1e-10:
            break
        slope = min((there - value) / step, -0.2)
        here, value = here + step, there
    return math.exp(here)


@part("species", "trap", "cloud", "losses", "target", "limits", keep=KEPT)
def _row(plan: Plan, candidate: CandidateChoice, in_light: bool, search: FieldSearch | None) -> CandidateRow:
    """The candidate that was put into the plan, judged."""
    state = load_species(plan.species.key).state(plan.species.state)
    trap = trap_facts(plan)
    cloud, failure, reason = None, None, ""
    if not trap.held:
        failure = Failure.NO_DATA if trap.untold else Failure.NOT_TRAPPED
        reason = trap.not_held
    else:
        try:
            cloud = cloud_answer(plan)
        except (ValueError, ArithmeticError) as error:
            failure, reason = Failure.NO_ANSWER, trap.no_frequencies or str(error)
        else:
            failure, reason = _failure(cloud)
            if failure is Failure.NO_DATA and search is not None and search.reason:
                reason = search.reason
    trap_answer(plan).survey.forget()
    return CandidateRow(
        candidate=candidate,
        plan=plan,
        state=state,
        trap=trap,
        cloud=cloud,
        failure=failure,
        reason=reason,
        in_light=in_light,
        search=search,
    )


def _failure(cloud: CloudAnswer) -> tuple[Failure | None, str]:
    """Where a trapped cloud fails on its way to degeneracy."""
    truncation = float(cloud.value("truncation")) if cloud.cloud.trap.depth is not None else math.inf
    if cloud.overfull:
        return Failure.TOO_SHALLOW, _("the trap does not hold so many atoms")
    if truncation < 1.0:
        return Failure.TOO_SHALLOW, _("the cloud is hotter than the trap is deep: depth/kT = {eta}").format(
            eta=number(truncation, 2)
        )
    scattering = cloud.scattering
    collides = float(cloud.equilibrium.elastic_collision_rate)
    if scattering.reason is WhyUnknown.POLARISED:
        if collides > 0.0:  # by their dipoles
            return None, ""
        return Failure.NO_COLLISIONS, _("fermions in one spin state do not meet in s-waves")
    if scattering.value is None:
        return Failure.NO_DATA, length_reason(cloud)
    if scattering.value == 0.0 and not collides > 0.0:
        return Failure.NO_COLLISIONS, _("the scattering length is zero")
    if cloud.bosons and scattering.value < 0.0:
        most = float(cloud.value("collapse_atoms"))
        return Failure.ATTRACTIVE, _("a condensate collapses beyond {atoms} atoms").format(atoms=number(most, 2))
    return None, ""
