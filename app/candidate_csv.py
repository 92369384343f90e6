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
    """One candidate a line: numbers in SI and in full precision, each followed by how sure it is; empty where
    unknown."""
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    header = ["species", "state", "trapped", "fails", "reason", "model", "model_reason"]
    for name in names:
        unit = COLUMNS[name].row.unit
        header += [name if unit == "1" else f"{name} [{unit}]", f"{name} certainty"]
    weighed = any(score.parts for score in scores)
    writer.writerow([*header, "score"] if weighed else header)
    for place, row in enumerate(rows):
        model = "" if row.cloud is None else row.cloud.model.value
        failure = "" if row.failure is None else row.failure.value
        line = [row.key, row.state.name, str(row.trapped).lower(), failure, row.reason, model, model_reason(row)]
        for name in names:
            cell = row.cell(name)
            line += [repr(cell.value) if cell.known else "", cell.sureness.value]
        if weighed:
            value = scores[place].value
            line.append("" if math.isnan(value) else repr(value))
        writer.writerow(line)
    return out.getvalue()
