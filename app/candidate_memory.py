"""What a window remembers of a comparison from one time to the next, as texts: columns, order, filters and weights."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field

from app.candidate_columns import COLUMNS, USUAL_COLUMNS
from app.candidate_order import SCORE, Sieve, Weight, read_sieve, read_weight

MEMORY_KEYS = ("columns", "order", "filters", "weights")
_DESCENDING, _ASCENDING = "descending", "ascending"


@dataclass(frozen=True, kw_only=True)
class CandidateMemory:
    """columns by name; ordered by a column, the score, or with an empty name as the data are."""

    columns: tuple[str, ...] = USUAL_COLUMNS
    ordered_by: str = ""
    descending: bool = True
    sieve: Sieve = field(default_factory=Sieve)
    weights: tuple[Weight, ...] = ()

    def texts(self) -> dict[str, tuple[str, ...]]:
        """By the names of MEMORY_KEYS."""
        order = (self.ordered_by, _DESCENDING if self.descending else _ASCENDING) if self.ordered_by else ()
        filters = (*(trait.value for trait in self.sieve.traits), *(bound.written for bound in self.sieve.bounds))
        weights = tuple(weight.written for weight in self.weights)
        return {"columns": self.columns, "order": order, "filters": filters, "weights": weights}


def memory_from(texts: Mapping[str, Sequence[str]]) -> CandidateMemory:
    """What `texts` gave; what cannot be read any more is left out."""
    columns = tuple(name for name in texts.get("columns", ()) if name in COLUMNS)
    order = tuple(texts.get("order", ()))
    known = len(order) == 2 and (order[0] in COLUMNS or order[0] == SCORE)
    sieve, weights = Sieve(), []
    for text in texts.get("filters", ()):
        try:
            one = read_sieve([text])
        except ValueError:
            continue
        sieve = Sieve(traits=(*sieve.traits, *one.traits), bounds=(*sieve.bounds, *one.bounds))
    for text in texts.get("weights", ()):
        try:
            weights.append(read_weight(text))
        except ValueError:
            continue
    return CandidateMemory(
        columns=columns or USUAL_COLUMNS,
        ordered_by=order[0] if known else "",
        descending=order[1] != _ASCENDING if known else True,
        sieve=sieve,
        weights=tuple(weights),
    )
