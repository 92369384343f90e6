"""Candidates as a CSV table."""

from __future__ import annotations

import csv
import io
import math
from collections.abc import Sequence
from typing import TYPE_CHECKING

from app.candidate_columns import COLUMNS
from app.candidate_words import model_reason

if TYPE_CHECKING:
    from app.answers.candidate_row import CandidateRow
    from app.candidate_order import Score


def candidates_csv(rows: Sequence[CandidateRow], names: Sequence[str], scores: Sequence[Score] = ()) -> str:
    """One candidate a line: numbers in SI and in full precision, each followed by how sure it is, and by the 16 and 84
    percent of it in columns where the stated uncertainties count; empty where unknown."""
    uncertain = {name for name in names if any(row.spread(name) is not None for row in rows)}
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    header = ["species", "state", "trapped", "fails", "reason", "model", "model_reason", "warnings"]
    for name in names:
        unit = COLUMNS[name].row.unit
        header += [name if unit == "1" else f"{name} [{unit}]", f"{name} certainty"]
        if name in uncertain:
            header += [f"{name} low", f"{name} high"]
    weighed = any(score.parts for score in scores)
    writer.writerow([*header, "score"] if weighed else header)
    for place, row in enumerate(rows):
        model = "" if row.cloud is None else row.cloud.model.value
        failure = "" if row.failure is None else row.failure.value
        trapped = "" if row.trapped is None else str(row.trapped).lower()
        warnings = " ".join(dict.fromkeys(warning.id for warning in row.warnings))
        line = [row.key, row.state.name, trapped, failure, row.reason, model, model_reason(row), warnings]
        for name in names:
            cell = row.cell(name)
            line += [repr(cell.value) if cell.known else "", cell.sureness.value]
            if name in uncertain:
                spread = row.spread(name)
                line += ["", ""] if spread is None else [_full(spread.low), _full(spread.high)]
        if weighed:
            value = scores[place].value
            line.append("" if math.isnan(value) else repr(value))
        writer.writerow(line)
    return out.getvalue()


def _full(bound: object) -> str:
    value = float(bound)  # type: ignore[arg-type]  # a number of NumPy
    return repr(value) if math.isfinite(value) else ""
