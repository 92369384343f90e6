"""How rows of a comparison are sifted, weighed and ordered: by what the user says, and nothing else.

An unknown number passes no bound, has no score and stands behind all known ones; it never counts as zero.
"""

from __future__ import annotations

import math
import re
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from enum import Enum

from app.answers.candidate_row import CandidateRow, Failure
from app.candidate_columns import COLUMNS, Column, column
from app.kinds import Kind
from app.language import translate as _
from app.units import read_quantity

SCORE = "score"
"""What the column of the weighted score is called, where a column is named."""


class Trait(Enum):
    """What a row may be asked to be."""

    BOSONS = "bosons"
    FERMIONS = "fermions"
    TRAPPED = "trapped"
    COLLIDING = "colliding"
    SOUND = "without failure"

    @property
    def label(self) -> str:
        return _(self.value)

    def holds(self, row: CandidateRow) -> bool:
        """Whether a row is that; collisions count only where they are known."""
        match self:
            case Trait.BOSONS:
                return row.bosons
            case Trait.FERMIONS:
                return not row.bosons
            case Trait.TRAPPED:
                return row.trapped is True
            case Trait.COLLIDING:
                return row.cell("elastic_collision_rate").value > 0.0
            case Trait.SOUND:
                return row.failure is None


@dataclass(frozen=True, kw_only=True)
class Bound:
    """The least, or the most, that a column may say. `text` is the limit as it was written, `value` in SI."""

    name: str
    text: str
    value: float
    least: bool = True

    def holds(self, row: CandidateRow) -> bool:
        found = row.cell(self.name).value
        return found >= self.value if self.least else found <= self.value

    @property
    def written(self) -> str:
        """The bound as `read_bound` reads it."""
        return f"{self.name} {'>=' if self.least else '<='} {self.text}"


@dataclass(frozen=True, kw_only=True)
class Sieve:
    """What rows must be to be shown; all of it."""

    traits: tuple[Trait, ...] = ()
    bounds: tuple[Bound, ...] = ()

    def passes(self, row: CandidateRow) -> bool:
        return all(trait.holds(row) for trait in self.traits) and all(bound.holds(row) for bound in self.bounds)

    @property
    def empty(self) -> bool:
        return not self.traits and not self.bounds


@dataclass(frozen=True, kw_only=True)
class Weight:
    """How much a column counts in the score, and which way."""

    name: str
    weight: float
    more_is_better: bool

    def __post_init__(self) -> None:
        if not 0.0 < self.weight < math.inf:
            raise ValueError(f"the weight of {self.name} must be positive and finite, got {self.weight:g}")

    @property
    def written(self) -> str:
        """The weight as `read_weight` reads it."""
        usual = COLUMNS[self.name].more_is_better is self.more_is_better
        return f"{self.name}={self.weight:g}" + ("" if usual else _LESS if not self.more_is_better else _MORE)


_LESS, _MORE = " less", " more"


@dataclass(frozen=True, kw_only=True)
class Score:
    """A weighted score from 0 to 1, NaN where a weighted number is not known.

    parts : what each weight adds, in their order; they sum to the score
    missing : names of the columns without a number
    """

    value: float
    parts: tuple[float, ...]
    missing: tuple[str, ...] = ()


def score_rows(rows: Sequence[CandidateRow], weights: Sequence[Weight]) -> tuple[Score, ...]:
    """The score of each row among these rows.

    A column gives 0 to its worst row and 1 to its best, the others by the logarithm of their number in between, or by
    the number itself in a column where one is not positive. The score is the mean of these by weight.
    """
    total = sum(weight.weight for weight in weights)
    shares = [_shares([row.cell(weight.name).value for row in rows], weight.more_is_better) for weight in weights]
    found = []
    for place in range(len(rows)):
        parts = tuple(
            weight.weight / total * share[place] for weight, share in zip(weights, shares, strict=True)
        )  # fmt: skip
        missing = tuple(
            weight.name for weight, share in zip(weights, shares, strict=True) if math.isnan(share[place])
        )  # fmt: skip
        value = math.nan if missing or not weights else math.fsum(parts)
        found.append(Score(value=value, parts=parts, missing=missing))
    return tuple(found)


def _shares(values: Sequence[float], more_is_better: bool) -> list[float]:
    known = [value for value in values if math.isfinite(value)]
    if not known:
        return [math.nan] * len(values)
    scale = math.log if min(known) > 0.0 else float
    low, high = scale(min(known)), scale(max(known))

    def share(value: float) -> float:
        if not math.isfinite(value):
            return math.nan
        place = (scale(value) - low) / (high - low) if high > low else 1.0
        return place if more_is_better or high == low else 1.0 - place

    return [share(value) for value in values]


def order_by(values: Sequence[float], descending: bool) -> tuple[int, ...]:
    """Places of the values in their order; what is not known comes last either way, equals stay as they are."""
    known = [place for place, value in enumerate(values) if math.isfinite(value)]
    unknown = [place for place, value in enumerate(values) if not math.isfinite(value)]
    # Sorting by the negative keeps equal ones in their order, which reversing would not.
    return (*sorted(known, key=lambda place: -values[place] if descending else values[place]), *unknown)


# --- as texts --------------------------------------------------------------------------------------------------------

_BOUND = re.compile(r"\s*(?P<name>[^<>≤≥=]+?)\s*(?P<sign>>=|<=|≥|≤|>|<)\s*(?P<limit>.+?)\s*")
_WEIGHT = re.compile(r"\s*(?P<name>[^=]+?)\s*(?:=\s*(?P<weight>[^\s]+)\s*(?P<way>more|less)?)?\s*")


def read_sieve(texts: Iterable[str]) -> Sieve:
    """The sieve that texts such as "bosons" or "total_lifetime >= 10 s" say.

    Raises ValueError, in one sentence, for anything else.
    """
    traits, bounds = [], []
    for text in texts:
        plain = text.strip().casefold()
        trait = next((trait for trait in Trait if trait.value == plain), None)
        if trait is not None:
            traits.append(trait)
        else:
            bounds.append(read_bound(text))
    return Sieve(traits=tuple(traits), bounds=tuple(bounds))


def read_bound(text: str) -> Bound:
    """A bound such as "elastic_collision_rate >= 5 1/s"."""
    found = _BOUND.fullmatch(text)
    if found is None:
        traits = ", ".join(trait.value for trait in Trait)
        raise ValueError(f'"{text}" is not a filter: write {traits}, or a column with a limit, such as "sag <= 50 um"')
    name = column(found["name"]).name
    limit = read_quantity(found["limit"], limit_kind(COLUMNS[name]))
    return Bound(name=name, text=limit.text, value=limit.value, least=found["sign"] in (">=", "≥", ">"))


def limit_kind(of: Column) -> Kind:
    """What a limit of a column may be."""
    row = of.row
    unit = "" if row.unit == "1" else row.unit
    units = tuple("" if name == "1" else name for name in row.units)
    example = f"10 {units[0]}".strip()
    return Kind(name=row.label, si_unit=unit, units=units, low=-1e300, high=1e300, example=example)


def read_weight(text: str) -> Weight:
    """A weight such as "good_to_bad_ratio=2", "sag = 1 less" or only a column, which then counts once.

    Raises ValueError, in one sentence, for anything else.
    """
    found = _WEIGHT.fullmatch(text)
    if found is None:
        raise ValueError(f'"{text}" is not a weight: write a column and how much it counts, such as "truncation=2"')
    of = column(found["name"])
    try:
        weight = float(found["weight"] or 1.0)
    except ValueError:
        raise ValueError(f'the weight of {of.name} must be a number, got "{found["weight"]}"') from None
    better = of.more_is_better if found["way"] is None else found["way"] == _MORE.strip()
    return Weight(name=of.name, weight=weight, more_is_better=better)


def fails(row: CandidateRow) -> bool:
    """Whether a row has no answer at all, which is not the same as an answer that says no."""
    return row.failure is Failure.NO_ANSWER
