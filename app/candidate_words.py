"""What is said of candidates: how a row and its numbers are read, where they fail, by which model they are judged."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from typing import TYPE_CHECKING

from app.answers.candidate_field import search_text
from app.answers.candidate_row import CandidateRow, Cell, Failure
from app.candidate_choices import Basis, Start
from app.candidate_columns import COLUMNS, Datum, Part
from app.caveat_words import caveat_line, caveat_text, line_of
from app.language import translate as _
from app.model_words import OBSTACLES
from app.quantities import display_factor
from app.sureness import Sureness
from app.units import best_unit
from app.words import number, row_tip, shown_unit, temperature

if TYPE_CHECKING:
    from app.answers.candidates import CandidatesAnswer
    from app.candidate_order import Score, Weight
    from app.plan import Plan
    from physics.species import State

UNKNOWN = "–"
_BASES = {
    Basis.SAME_FREQUENCIES: _("in the same frequencies"),
    Basis.SAME_LIGHT: _("in the same light and coils"),
    Basis.SAME_START: _("from the same start"),
}
_STARTS = {
    Start.ATOMS_AND_TEMPERATURE: _("same atoms and temperature"),
    Start.PHASE_SPACE_DENSITY: _("same phase-space density"),
}


def short_state(state: State) -> str:
    """The state in the least room in which it can still be read back: "|1,-1>" for "F=1 mF=-1"."""
    parts = state.components or (state.name,)
    return " & ".join(_short(part) for part in parts)


def _short(name: str) -> str:
    words = name.split()
    if len(words) == 2 and words[0].startswith("F=") and words[1].startswith("mF="):
        return f"|{words[0][2:]},{words[1][3:]}>"
    return name


def short_name(row: CandidateRow) -> str:
    """Species and state of a row, short."""
    return f"{row.key} {short_state(row.state)}"


# --- numbers ---------------------------------------------------------------------------------------------------------


def unit_for_column(name: str, cells: Iterable[Cell], chosen: str = "") -> str:
    """The unit of a column: the chosen one where the column offers it, else the one that suits most of its numbers."""
    row = COLUMNS[name].row
    if chosen in row.units:
        return chosen
    sizes = sorted(abs(cell.value) for cell in cells if cell.known and cell.value)
    if len(row.units) == 1 or "%" in row.units or not sizes:
        return row.units[0]
    # Of one family: nm beside a0, or kHz beside nK, is for the reader to choose.
    alike = tuple(unit for unit in row.units if unit[-1:] == row.units[0][-1:])
    return best_unit(sizes[len(sizes) // 2], alike, row.unit)


def cell_number(cell: Cell, name: str, unit: str) -> str:
    """A number in a unit, without mark and unit; a dash where there is none."""
    if not cell.known:
        return UNKNOWN
    return number(cell.value / display_factor(unit, COLUMNS[name].row)).replace("-", "−")


def cell_text(cell: Cell, name: str, unit: str) -> str:
    """A number in a unit with the mark of how sure it is."""
    return cell_number(cell, name, unit) + cell.sureness.mark


def cell_tip(row: CandidateRow, name: str, unit: str) -> str:
    """All that a reader wants to know of a number: how much, how sure, on what it rests, why it is missing."""
    column, cell = COLUMNS[name], row.cell(name)
    lines = [f"{row.key} {row.state.name}: {column.row.label}, {column.row.symbol}"]
    if cell.known:
        lines.append(f"{cell_number(cell, name, unit)} {shown_unit(unit)}".strip() + f"  ({cell.sureness.value})")
        spread = row.spread(name)
        if spread is not None:
            factor = display_factor(unit, column.row)
            low, high = number(float(spread.low) / factor), number(float(spread.high) / factor)
            lines.append(_("68 % of the draws: {low} to {high}").format(low=low, high=high))
    else:
        lines.append(_("no value: {reason}").format(reason=cell.reason))
    if cell.known and cell.reason:
        lines.append(_("assumed: {what}").format(what=cell.reason))
    lines += source_lines(row, name)
    if column.part is Part.TUNING and row.described_fields:
        fields = ", ".join(f"{1e4 * low:.4g}–{1e4 * high:.4g} G" for low, high in row.described_fields)
        lines.append(_("the data tune this state at {fields}").format(fields=fields))
    return "\n".join([*lines, row_tip(column.row)])


def source_lines(row: CandidateRow, name: str) -> list[str]:
    """Where the data under a number are from, and how sure they are."""
    lines, cloud = [], row.cloud
    data = COLUMNS[name].data
    if cloud is not None and Datum.LENGTH in data and cloud.scattering.value is not None:
        lines.append(_sourced(_("scattering length"), cloud.scattering.source, cloud.scattering.certainty))
    if cloud is not None:
        for datum, word, sourced in (
            (Datum.TWO_BODY, _("two-body constant"), cloud.losses.two_body),
            (Datum.THREE_BODY, _("three-body constant"), cloud.losses.three_body),
        ):
            if datum in data and sourced is not None:
                lines.append(_sourced(word, sourced.source, sourced.certainty))
    if Datum.RESONANCES in data and row.broadest_resonance is not None:
        found = row.broadest_resonance.position
        lines.append(_sourced(_("resonance"), found.source, found.certainty))
    if Datum.TRAP in data and row.in_light and row.trap.sureness is not Sureness.SEEN:
        lines.append(_("what the trap does to these atoms: {sure}").format(sure=row.trap.sureness.value))
    return lines


def _sourced(word: str, source: str, certainty: object) -> str:
    from app.sureness import sureness_of

    sure = sureness_of(certainty).value  # type: ignore[arg-type]  # None of a typed number
    return f"{word}: {source} ({sure})"


# --- rows ------------------------------------------------------------------------------------------------------------


def status_text(row: CandidateRow) -> str:
    """Where a row fails, in a word or two, else how many warnings its numbers carry; empty where there is nothing."""
    if row.failure is not None or not row.warnings:
        return "" if row.failure is None else row.failure.label
    return f"{warning_sign(row)} {len(row.warnings)}"


def warning_sign(row: CandidateRow) -> str:
    """The sign of the gravest warning of a row that has any."""
    return line_of(row.warnings[0].severity, "").sign


def warning_texts(row: CandidateRow) -> tuple[str, ...]:
    """What to mind about the numbers of a row: sentences, the gravest first."""
    cloud = row.cloud
    return () if cloud is None else tuple(caveat_text(caveat, cloud) for caveat in row.warnings)


def model_text(row: CandidateRow) -> str:
    """The model of a row, marked where it stands for another one; a dash where the row has none."""
    if row.cloud is None:
        return UNKNOWN
    return row.cloud.model.label + ("*" if row.cloud.equilibrium.replaced is not None else "")


def model_reason(row: CandidateRow) -> str:
    """Why the model of a row is not the one that was asked for, as a clause; empty where it is."""
    cloud = row.cloud
    if cloud is None or cloud.equilibrium.replaced is None:
        return ""
    from physics.models import Model

    asked = row.plan.cloud.model or Model.SEMI_IDEAL
    return _("{asked} {obstacle}").format(asked=asked.label, obstacle=OBSTACLES[cloud.equilibrium.replaced])


def row_tip_text(row: CandidateRow) -> str:
    """What is to be said of a row as a whole."""
    lines = [f"{row.key} {row.state.name}"]
    if row.failure is not None:
        lines.append(f"{row.failure.label}: {row.reason}")
    if row.cloud is not None:
        lines.append(_("model: {model}").format(model=row.cloud.model.label))
    if reason := model_reason(row):
        lines.append(reason)
    if row.cloud is not None:
        for warning in row.warnings:
            line = caveat_line(warning, row.cloud)
            lines.append(f"{line.sign} {line.word}: {line.sentence}")
    own = row.candidate
    for word, quantity in (
        (_("atoms"), own.atoms),
        (_("temperature"), own.temperature),
        (_("field"), own.field),
        (_("scattering length"), own.scattering_length),
    ):
        if quantity is not None:
            lines.append(_("its own {what}: {text}").format(what=word, text=quantity.text))
    if row.search is not None:
        lines.append(search_text(row.search))
    return "\n".join(lines)


def score_text(score: Score) -> str:
    """A score with the parts that it is made of."""
    if math.isnan(score.value):
        return UNKNOWN
    parts = " + ".join(f"{part:.2f}" for part in score.parts)
    return f"{score.value:.2f} = {parts}" if len(score.parts) > 1 else f"{score.value:.2f}"


def score_tip(score: Score, weights: Sequence[Weight]) -> str:
    """How a score comes about, weight by weight."""
    if not weights:
        return _("No column has a weight.")
    total = sum(weight.weight for weight in weights)
    lines = []
    for weight, part in zip(weights, score.parts, strict=True):
        way = _("more is better") if weight.more_is_better else _("less is better")
        share = (
            _("not known") if math.isnan(part) else f"{part * total / weight.weight:.2f} × {weight.weight:g}/{total:g}"
        )
        lines.append(f"{COLUMNS[weight.name].row.label} ({way}): {share}")
    lines.append(_("Each column counts 0 for the worst row on show and 1 for the best, by the logarithm in between."))
    if score.missing:
        lines.insert(0, _("No score: a number that counts is not known."))
    return "\n".join(lines)


def failure_groups(rows: Iterable[CandidateRow]) -> list[tuple[Failure, str, list[CandidateRow]]]:
    """Rows that fail, by where and why; the gravest first."""
    groups: dict[tuple[Failure, str], list[CandidateRow]] = {}
    for row in rows:
        if row.failure is not None:
            groups.setdefault((row.failure, row.reason), []).append(row)
    order = list(Failure)
    return [
        (failure, reason, members)
        for (failure, reason), members in sorted(groups.items(), key=lambda item: order.index(item[0][0]))
    ]


def names_of(rows: Sequence[CandidateRow]) -> str:
    """The rows of a group in few words: a species once, where all rows of it that there are fail alike."""
    found: dict[str, list[str]] = {}
    for row in rows:
        found.setdefault(row.key, []).append(short_state(row.state))
    return ", ".join(f"{key} {'; '.join(states)}" for key, states in found.items())


# --- the whole -------------------------------------------------------------------------------------------------------


def basis_text(basis: Basis, start: Start) -> str:
    """In what the candidates are compared."""
    said = _BASES[basis]
    return f"{said} ({_STARTS[start]})" if basis is Basis.SAME_START else said


def heading(answer: CandidatesAnswer, plan: Plan) -> str:
    """What is compared, in one line."""
    species = len({row.key for row in answer.rows})
    atoms, hot = plan.cloud.atoms.value, plan.cloud.temperature.value
    said = _("{states} of {species} species {basis}: {atoms} atoms at {temperature}")
    if answer.basis is Basis.SAME_START and answer.start is Start.PHASE_SPACE_DENSITY:
        said = _("{states} of {species} species {basis}: as far from degeneracy as {atoms} of {own} at {temperature}")
    return said.format(
        states=_("1 state") if len(answer.rows) == 1 else _("{count} states").format(count=len(answer.rows)),
        species=species,
        basis=basis_text(answer.basis, answer.start),
        atoms=number(atoms, 2),
        temperature=temperature(hot),
        own=plan.species.key,
    )


def summary(rows: Sequence[CandidateRow], shown: int) -> str:
    """How many rows are sound, and how many fail where; in one sentence."""
    fine = sum(row.failure is None for row in rows)
    parts = [_("{count} of {all} without failure").format(count=fine, all=len(rows))]
    for failure in Failure:
        count = sum(row.failure is failure for row in rows)
        if count:
            parts.append(f"{count} {failure.label}")
    said = ", ".join(parts) + "."
    if shown < len(rows):
        said += " " + _("{shown} pass the filters.").format(shown=shown)
    return said
