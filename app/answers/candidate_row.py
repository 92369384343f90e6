"""One candidate, judged: what the columns of a comparison say of it, how sure that is, and where it fails."""

from __future__ import annotations

import math
from dataclasses import dataclass
from enum import Enum
from functools import cached_property
from typing import TYPE_CHECKING

from app.answers.candidate_assumed import assumptions
from app.answers.candidate_trap import TrapFacts
from app.answers.uncertainty import Spread
from app.candidate_columns import COLUMNS, Column, Datum, Part
from app.language import translate as _
from app.quantities import QUANTITIES
from app.quantity_row import Need
from app.sureness import Sureness, least_sure, sureness_of
from app.words import reason_missing
from physics.caveats import Caveat, Severity
from physics.constants import boltzmann
from physics.scattering import WhyUnknown, tuning
from physics.species_tables import Resonance

if TYPE_CHECKING:
    from app.answers.candidate_evaporation import EvaporationResult
    from app.answers.candidate_field import FieldSearch
    from app.answers.cloud import CloudAnswer
    from app.plan import CandidateChoice, Plan
    from physics.species import State


class Failure(Enum):
    """Where a candidate fails, the gravest first."""

    NOT_TRAPPED = "not trapped"
    NO_ANSWER = "no answer"
    TOO_SHALLOW = "too shallow"
    NO_COLLISIONS = "no collisions"
    NO_DATA = "no data"
    ATTRACTIVE = "attractive"

    @property
    def label(self) -> str:
        return _(self.value)


@dataclass(frozen=True, kw_only=True)
class Cell:
    """One number of a row, in SI; NaN where there is none, with the reason.

    reason : why there is no number, or what is assumed
    """

    value: float
    sureness: Sureness
    reason: str = ""

    @property
    def known(self) -> bool:
        return math.isfinite(self.value)


@dataclass(frozen=True, kw_only=True, eq=False)
class CandidateRow:
    """A candidate as it is judged.

    candidate : species and state, with the conditions of its own
    plan : the plan with this candidate in it
    trap : what the trap is to it
    cloud : its answer; None where there is none
    failure, reason : where it fails and why, as a clause; None and empty where it does not
    in_light : whether its trap follows from data of the species
    search : the field that was sought for it; None where none was
    evaporation : the best evaporation; None before it was worked out
    """

    candidate: CandidateChoice
    plan: Plan
    state: State
    trap: TrapFacts
    cloud: CloudAnswer | None
    failure: Failure | None
    reason: str
    in_light: bool
    search: FieldSearch | None = None
    evaporation: EvaporationResult | None = None

    @property
    def key(self) -> str:
        return self.state.key

    @property
    def name(self) -> str:
        """Species and state, as a row is called."""
        return f"{self.state.key}  {self.state.name}"

    @property
    def bosons(self) -> bool:
        return self.state.isotope.statistics.value == "boson"

    @property
    def trapped(self) -> bool | None:
        """Whether atoms are held; None where the data do not tell."""
        return None if self.trap.untold else self.trap.held

    @property
    def warnings(self) -> tuple[Caveat, ...]:
        """What the numbers of the cloud do not cover, the gravest first; notes are left out."""
        caveats = () if self.cloud is None else self.cloud.caveats
        return tuple(caveat for caveat in caveats if caveat.severity is not Severity.NOTE)

    @cached_property
    def broadest_resonance(self) -> Resonance | None:
        """Of those by which the data tune the state."""
        found = [resonance for form in tuning(self.state) for resonance in form.resonances]
        return max(found, key=lambda resonance: abs(resonance.width.value), default=None)

    @property
    def described_fields(self) -> tuple[tuple[float, float], ...]:
        """Ranges of field [T] in which the data tune the state."""
        return tuple((form.low, form.high) for form in tuning(self.state))

    # ---------------------------------------------------------------- cells

    def cell(self, name: str) -> Cell:
        """What a column says of this candidate."""
        if name not in self._cells:
            self._cells[name] = self._cell(COLUMNS[name])
        return self._cells[name]

    @cached_property
    def _cells(self) -> dict[str, Cell]:
        return {}

    def spread(self, name: str) -> Spread | None:
        """16 to 84 percent of a number over the stated uncertainties; None where it has none."""
        column, cloud = COLUMNS[name], self.cloud
        if cloud is None or not self.cell(name).known:
            return None
        if column.part is Part.CLOUD:
            return cloud.spread(name)
        if column.part is not Part.THRESHOLD:
            return None
        share = 1.0 if cloud.bosons else cloud.threshold
        found = cloud.spread("critical_temperature" if cloud.bosons else "fermi_temperature")
        if found is None:
            return None
        return Spread(
            low=share * found.low, median=share * found.median, high=share * found.high, method=found.method
        )  # fmt: skip

    def _cell(self, column: Column) -> Cell:
        value, reason = self._value(column)
        if not math.isfinite(value):
            return Cell(value=math.nan, sureness=Sureness.UNKNOWN, reason=reason or _("not defined for this cloud"))
        assumed = assumptions(self, column)
        sure = [self._sureness(datum) for datum in column.data]
        if assumed:
            sure.append(Sureness.ASSUMED)
        return Cell(value=value, sureness=least_sure(*sure), reason=assumed)

    def _value(self, column: Column) -> tuple[float, str]:
        """The number, NaN where there is none, and why there is none."""
        name, cloud = column.name, self.cloud
        match column.part:
            case Part.SPECIES:
                return self.state.mass, ""
            case Part.TUNING:
                return self._tuning(name)
            case Part.TRAP:
                return self.trap.values[name], self.trap.reasons[name]
            case Part.FIELD:
                return self._field()
        if cloud is None:
            return math.nan, self.reason
        match column.part:
            case Part.LENGTH:
                found = cloud.scattering
                return (found.value, "") if found.value is not None else (math.nan, length_reason(cloud))
            case Part.THRESHOLD:
                return self._threshold(cloud)
            case Part.CEILING:
                return self._at_ceiling(cloud)
            case Part.EVAPORATION:
                return self._evaporation(name)
        if name == "temperature_to_threshold" and not self.cell("threshold_temperature").known:
            return math.nan, self.cell("threshold_temperature").reason
        need = cloud.missing(column.row)
        if need is not None:
            return math.nan, self._reason_missing(need, cloud)
        return float(cloud.value(name)), ""

    def _threshold(self, cloud: CloudAnswer) -> tuple[float, str]:
        name, share = ("critical_temperature", 1.0) if cloud.bosons else ("fermi_temperature", cloud.threshold)
        found = share * float(cloud.value(name))
        if not math.isfinite(found):
            need = cloud.missing(QUANTITIES[name])
            return math.nan, "" if need is None else reason_missing(need)
        depth = cloud.cloud.trap.depth
        if depth is not None and boltzmann * found > float(depth):
            return math.nan, _("at its threshold the cloud would be hotter than the trap is deep")
        return found, ""

    def _reason_missing(self, need: Need, cloud: CloudAnswer) -> str:
        said = reason_missing(need)
        return f"{said}: {length_reason(cloud)}" if _LENGTH_NEEDS & {need} and cloud.scattering.value is None else said

    def _tuning(self, name: str) -> tuple[float, str]:
        found = self.broadest_resonance
        if found is None:
            return math.nan, _("the data have no magnetic resonance of this state")
        return (found.position.value if name == "resonance_field" else abs(found.width.value)), ""

    def _field(self) -> tuple[float, str]:
        field, search = self.plan.species.field, self.search
        if field is None:
            return math.nan, search.reason if search is not None and search.reason else _("no field is given")
        return field.value, ""

    def _at_ceiling(self, cloud: CloudAnswer) -> tuple[float, str]:
        if cloud.scattering.value is None:
            return math.nan, length_reason(cloud)
        if not cloud.bosons:
            return math.nan, _("the law of bosons does not hold for fermions")
        if not cloud.scattering.value > 0.0:
            return math.nan, _("no such bound where the scattering length is not positive")
        return float(cloud.solution.rates.good_to_bad_at_ceiling), ""

    def _evaporation(self, name: str) -> tuple[float, str]:
        if self.evaporation is None:
            return math.nan, _("not worked out yet")
        return getattr(self.evaporation, _OF_EVAPORATION[name]), self.evaporation.reason

    # ---------------------------------------------------------------- how sure

    def _sureness(self, datum: Datum) -> Sureness:
        cloud = self.cloud
        match datum:
            case Datum.TRAP:
                return self.trap.sureness if self.in_light else Sureness.SEEN
            case Datum.RESONANCES:
                forms = tuning(self.state)
                return least_sure(*(sureness_of(form.certainty) for form in forms))
        if cloud is None:
            return Sureness.SEEN
        if datum is Datum.LENGTH:
            # Where it is not known, it does not enter what has a value without it.
            return sureness_of(cloud.scattering.certainty)
        sourced = cloud.losses.two_body if datum is Datum.TWO_BODY else cloud.losses.three_body
        return Sureness.SEEN if sourced is None else sureness_of(sourced.certainty)


_OF_EVAPORATION = {"evaporated_atoms": "atoms", "evaporation_time": "time"}
_LENGTH_NEEDS = frozenset(
    {
        Need.SCATTERING_LENGTH,
        Need.COLLISIONS,
        Need.REPULSIVE,
        Need.ATTRACTIVE,
        Need.INTERACTING_CONDENSATE,
        Need.STABLE_CONDENSATE,
    }
)


def length_reason(cloud: CloudAnswer) -> str:
    """Why a cloud has no scattering length, and at which fields the data have one."""
    found = cloud.scattering
    fields = _(" or ").join(f"{1e4 * low:.4g}–{1e4 * high:.4g} G" for low, high in found.ranges)
    match found.reason:
        case WhyUnknown.NEEDS_FIELD if fields:
            return _("needs a magnetic field: the data have the scattering length at {fields}").format(fields=fields)
        case WhyUnknown.OUTSIDE_RANGE if fields:
            return _("at this field the data say nothing: they do at {fields}").format(fields=fields)
        case None:
            return ""
        case reason:
            return _(reason.value)
