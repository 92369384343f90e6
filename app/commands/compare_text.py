"""What `coldward compare` prints: a brief table, and under it where candidates fail and what to take care of."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from app.answers.candidate_row import CandidateRow
    from app.answers.candidates import CandidatesAnswer
    from app.candidate_order import Score, Weight
    from app.plan import Plan


_SHORT_HEADINGS = {
    "threshold_temperature": "threshold T",
    "peak_phase_space_density": "peak nλ³",
    "scattering_length": "a",
    "magnetic_field": "B",
    "good_to_bad_at_ceiling": "at K₃ ceiling",
    "elastic_collision_rate": "elastic",
    "good_to_bad_ratio": "good/bad",
    "evaporated_atoms": "left",
    "evaporation_time": "after",
}
"""What the brief table says over its columns, where a label would be too wide."""


def compare_text(
    answer: CandidatesAnswer,
    plan: Plan,
    rows: list[CandidateRow],
    names: tuple[str, ...],
    scores: list[Score],
    weights: tuple[Weight, ...],
) -> str:
    """The answer as a readable page."""
    from app import candidate_words as words
    from app.candidate_columns import COLUMNS
    from app.sureness import legend
    from app.tables import text_table
    from app.words import shown_unit

    units = {name: words.unit_for_column(name, [row.cell(name) for row in rows]) for name in names}
    header = ["species", "state"]
    for name in names:
        title, unit = _SHORT_HEADINGS.get(name, COLUMNS[name].row.symbol), shown_unit(units[name])
        header.append(f"{title} [{unit}]" if unit else title)
    table = [
        [
            row.key,
            words.short_state(row.state),
            *(_padded(words.cell_text(row.cell(name), name, units[name])) for name in names),
        ]
        for row in rows
    ]
    if weights:
        header.append("score")
        table = [[*cells, words.score_text(score)] for cells, score in zip(table, scores, strict=True)]
    lines = [words.heading(answer, plan), words.summary(answer.rows, len(rows)), ""]
    if rows:
        lines += [text_table(header, table, right=range(2, len(header))), "", legend()]
    for title, groups in (
        ("Where they fail", _failures(rows)),
        ("Fields that were sought", _searches(rows)),
        ("Where evaporation falls short", _evaporations(rows)),
        ("Another model than the usual", _models(rows)),
        ("Take care: `coldward state` says more of each", _warnings(rows)),
    ):
        if groups:
            lines += ["", title, *groups]
    return "\n".join(lines)


def _padded(text: str) -> str:
    """The text with room for a mark, so that numbers without one stand under those with one."""
    return text if text[-1:] in "ʳᶜᵃ" else f"{text} "


def _failures(rows: list[CandidateRow]) -> list[str]:
    from app.candidate_words import failure_groups

    return _wrapped((f"{failure.label}: {reason}", members) for failure, reason, members in failure_groups(rows))


def _evaporations(rows: list[CandidateRow]) -> list[str]:
    groups: dict[str, list[CandidateRow]] = {}
    for row in rows:
        if row.evaporation is not None and row.evaporation.reason and row.evaporation.reason != row.reason:
            groups.setdefault(row.evaporation.reason, []).append(row)
    return _wrapped(groups.items())


def _models(rows: list[CandidateRow]) -> list[str]:
    from app.candidate_words import model_reason

    groups: dict[str, list[CandidateRow]] = {}
    for row in rows:
        reason = model_reason(row)
        if reason and row.cloud is not None:
            groups.setdefault(f"{row.cloud.model.label}, as {reason}", []).append(row)
    return _wrapped(groups.items())


def _searches(rows: list[CandidateRow]) -> list[str]:
    import textwrap

    from app.answers.candidate_field import found_text, wish_text
    from app.candidate_words import names_of

    wishes: dict[str, dict[str, list[CandidateRow]]] = {}
    for row in rows:
        if row.search is not None:
            found = wishes.setdefault(wish_text(row.search.wish), {})
            found.setdefault(found_text(row.search), []).append(row)
    lines: list[str] = []
    for wish, found in wishes.items():
        lines += textwrap.wrap(wish, 98, initial_indent="  ", subsequent_indent="    ")
        for said, members in found.items():
            text = f"{names_of(members)}: {said}"
            lines += textwrap.wrap(
                text, 98, initial_indent="      ", subsequent_indent="        ", break_on_hyphens=False
            )
    return lines


def _warnings(rows: list[CandidateRow]) -> list[str]:
    groups: dict[str, list[CandidateRow]] = {}
    for row in rows:
        for name in dict.fromkeys(warning.id for warning in row.warnings):
            groups.setdefault(name.replace("_", " "), []).append(row)
    return _wrapped(groups.items())


def _wrapped(groups: Any) -> list[str]:
    import textwrap

    from app.candidate_words import names_of

    lines: list[str] = []
    for reason, members in groups:
        lines += textwrap.wrap(reason, 98, initial_indent="  ", subsequent_indent="    ")
        lines += textwrap.wrap(
            names_of(members), 98, initial_indent="      ", subsequent_indent="      ", break_on_hyphens=False
        )
    return lines
