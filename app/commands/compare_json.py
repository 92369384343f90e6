"""The JSON object of `coldward compare`: SI throughout, null where a number is not known."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from app.answers.candidate_field import FieldSearch
    from app.answers.candidate_row import CandidateRow
    from app.answers.candidates import CandidatesAnswer
    from app.candidate_order import Score, Weight


def compare_body(
    answer: CandidatesAnswer,
    rows: list[CandidateRow],
    names: tuple[str, ...],
    scores: list[Score],
    weights: tuple[Weight, ...],
) -> dict[str, Any]:
    """The answer as the JSON contract has it; numbers in SI."""
    from app.candidate_choices import Basis
    from app.candidate_words import model_reason
    from app.commands.state import caveats_body

    found = []
    for row, score in zip(rows, scores, strict=True):
        entry: dict[str, Any] = {
            "key": row.key,
            "state": row.state.name,
            "trapped": row.trapped,
            "reason": row.reason or None,
            "model": None if row.cloud is None else row.cloud.model.value,
            "fails": None if row.failure is None else row.failure.value,
            "model_reason": model_reason(row) or None,
            "field_search": None if row.search is None else _search(row.search),
            "quantities": {name: _quantity(row, name) for name in names},
            "caveats": [] if row.cloud is None else caveats_body(row.cloud),
        }
        if weights:
            entry["score"] = _finite(score.value)
            entry["score_parts"] = {
                weight.name: _finite(part) for weight, part in zip(weights, score.parts, strict=True)
            }
        found.append(entry)
    same = {"start": answer.start.value} if answer.basis is Basis.SAME_START else {}
    return {"basis": answer.basis.value, **same, "rows": found}


def _search(search: FieldSearch) -> dict[str, Any]:
    from app.answers.candidate_field import search_text

    wish, found = search.wish, search.found
    return {
        "lowest_field": wish.lowest.value,
        "highest_field": wish.highest.value,
        "wanted_length": None if wish.length is None else wish.length.value,
        "field": None if found is None else found.field,
        "scattering_length": None if found is None else found.length,
        "slope": None if found is None else found.slope,
        "nearly_as_good": None if found is None else [found.low, found.high],
        "reason": search.reason or None,
        "text": search_text(search),
    }


def _quantity(row: CandidateRow, name: str) -> dict[str, Any]:
    from app.candidate_columns import COLUMNS

    cell, of = row.cell(name), COLUMNS[name].row
    entry: dict[str, Any] = {"value": _finite(cell.value), "unit": of.unit, "low": None, "high": None}
    spread = row.spread(name)
    if spread is not None:
        entry |= {
            place: _finite(float(bound))
            for place, bound in (("low", spread.low), ("high", spread.high), ("median", spread.median))
        }
    if cell.reason:
        entry["reason"] = cell.reason
    return {**entry, "certainty": cell.sureness.value, "label": of.label, "source": of.source}


def _finite(value: float) -> float | None:
    import math

    return value if math.isfinite(value) else None
