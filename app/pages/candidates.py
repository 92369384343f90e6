"""The Candidates page: species and states side by side in a table, on a map of thresholds, and ranked by a column."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import Any

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QSplitter, QStackedWidget, QVBoxLayout, QWidget

from app.answers.candidate_evaporation import EvaporationResult, evaporation_key, hopeless
from app.answers.candidate_jobs import (
    Evaporated,
    Found,
    Refused,
    candidates_depend_on,
    candidates_job,
    evaporations_job,
)
from app.answers.candidate_row import CandidateRow
from app.candidate_choices import Basis, basis_of
from app.candidate_columns import COLUMNS, USUAL_COLUMNS
from app.candidate_csv import candidates_csv
from app.candidate_memory import CandidateMemory, memory_from
from app.candidate_order import SCORE, Score, order_by, score_rows
from app.candidate_selection import own_of
from app.candidate_words import heading, summary, unit_for_column
from app.engine import CloudAnswer
from app.figures.theme import Theme
from app.language import translate as _
from app.newest import Job
from app.plan import Plan
from app.widgets.banner import Offer
from app.widgets.candidate_bar import ChoiceBar, ViewBar
from app.widgets.candidate_model import Shown
from app.widgets.candidate_pictures import CandidatePictures
from app.widgets.candidate_questions import CandidateQuestions
from app.widgets.candidate_rules import CandidateRules
from app.widgets.candidate_table import CandidateTable
from app.widgets.detail import Detail
from app.widgets.single_plot_page import SinglePlotPage

_NO_CELL = _("Choose a cell of the table to read its formula, its range and its source here.")
HINT = _("Return, or a double click in the table, uses a species")


class CandidatesPage(SinglePlotPage):
    title = "Candidates"
    needs_cloud = False  # where the plan's own atoms are not held, it is others that are looked for
    plot_name = "Candidates compared"

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(theme, parent)
        self.sorted_by, self.descending = "", True
        self._units: dict[str, str] = {}
        self._found: Found | Refused | None = None
        self._pictures = CandidatePictures(self.plot.canvas)
        self._evaporations: dict[object, EvaporationResult] = {}
        self._evaporating: tuple[CandidateRow, ...] = ()
        self._rows: tuple[CandidateRow, ...] = ()
        self._scores: tuple[Score, ...] = ()
        self.choices, self.view = ChoiceBar(), ViewBar()
        self.questions = CandidateQuestions(self)
        self.questions.plan_edited.connect(self.plan_edited)
        self.choices.basis_chosen.connect(self.questions.choose_basis)
        self.choices.species_asked.connect(self.questions.ask_species)
        self.choices.fields_asked.connect(self.questions.ask_fields)
        self.choices.evaporation_asked.connect(self.ask_evaporation)
        self.choices.columns_chosen.connect(self.choose_columns)
        self.view.view_chosen.connect(self._choose_view)
        self.view.order_chosen.connect(self._order)
        self.options.addWidget(self.choices)
        self.rules = CandidateRules()
        self.choices.rules_shown.connect(self.rules.setVisible)
        self.rules.changed.connect(self._rules_changed)
        self.rules.hide()
        self.options.addWidget(self.rules)
        self.table = CandidateTable()
        self.table.sort_asked.connect(self.sort_by)
        self.table.unit_chosen.connect(self._choose_unit)
        self.table.hide_asked.connect(lambda name: self.choices.toggle(name, False))
        self.table.use_asked.connect(self.questions.use)
        self.table.conditions_asked.connect(self.questions.ask_conditions)
        self.table.detail_changed.connect(self._explain)
        self.splitter = QSplitter(Qt.Orientation.Vertical)
        self.splitter.setHandleWidth(1)
        self.splitter.setChildrenCollapsible(False)
        column = self._plotted.layout()
        assert isinstance(column, QVBoxLayout)
        column.removeWidget(self.plot.canvas)
        column.insertWidget(1, self.splitter, 1)
        self.splitter.addWidget(self.table)
        self.splitter.addWidget(self._make_lower())
        self.splitter.setSizes([380, 420])
        self.bar.status.say(HINT)
        self.plot.canvas.pointer_moved.connect(self._read_pointer)
        self._count_rules()

    def _make_lower(self) -> QWidget:
        """Plot and explanation, and the choice between them."""
        self.explanation = Detail()
        self.explanation.setAccessibleName(_("Explanation of the cell that the keyboard is on"))
        self.explanation.document().setDocumentMargin(14)
        self.explanation.show_text(_NO_CELL)
        self.lower_half = QStackedWidget()
        self.lower_half.addWidget(self.plot.canvas)
        self.lower_half.addWidget(self.explanation)
        box = QWidget()
        column = QVBoxLayout(box)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(0)
        column.addWidget(self.view)
        column.addWidget(self.lower_half, 1)
        return box

    # ---------------------------------------------------------------- what is remembered

    def memory(self) -> dict[str, tuple[str, ...]]:
        """Columns, order, filters and weights, as texts."""
        return CandidateMemory(
            columns=self.names,
            ordered_by=self.sorted_by,
            descending=self.descending,
            sieve=self.rules.sieve,
            weights=self.rules.weights,
        ).texts()

    def recall(self, texts: Mapping[str, Sequence[str]], units: Mapping[str, str]) -> None:
        kept = memory_from(texts)
        self._units = dict(units)
        self.choices.names, self.sorted_by, self.descending = kept.columns, kept.ordered_by, kept.descending
        self.rules.set_rules(kept.sieve, kept.weights)
        self._count_rules()

    # ---------------------------------------------------------------- the answer

    def part(self, plan: Plan) -> Job | None:
        self._take_plan(plan)
        if basis_of(plan) is Basis.SAME_LIGHT and plan.trap.harmonic:
            self._show_no_light()
            return None
        found = self._found
        whole = isinstance(found, Refused) or (found is not None and found.answer.complete)
        if found is None or found.depends_on != candidates_depend_on(plan) or not whole:
            self._evaporating = ()
            return candidates_job(plan)
        if not self._evaporating_still:
            self._show()
            return None
        return evaporations_job(self._evaporating_still)

    @property
    def _evaporating_still(self) -> tuple[CandidateRow, ...]:
        """Rows whose evaporation is asked for and has not come."""
        return tuple(row for row in self._evaporating if evaporation_key(row.plan) not in self._evaporations)

    def take_part(self, answer: Any) -> None:
        if isinstance(answer, Evaporated):
            self._evaporations.update(answer.results)
        else:
            self._found = answer
        self._show()

    def show_end(self, *, stopped: bool) -> None:
        super().show_end(stopped=stopped)
        if not stopped:
            self._evaporating = self._evaporating_still

    def _take_plan(self, plan: Plan) -> None:
        self.questions.plan = plan
        self.choices.show_basis(basis_of(plan), plan.candidates.start)

    def show_cloud(self, cloud: CloudAnswer) -> None:
        super().show_cloud(cloud)
        self._take_plan(cloud.plan)
        if self.isVisible() and self._found is not None:
            self._show()

    def mark_stale(self, reason: str) -> None:
        super().mark_stale(reason)
        self.table.mark_stale()

    # ---------------------------------------------------------------- showing

    def _show_no_light(self) -> None:
        self.show_empty(
            _("The trap of this plan is given by its frequencies: there is no light to compare species in."),
            _("Compare them in the same frequencies, or make the trap of beams or coils in the Trap form."),
            (Offer(_("Same frequencies"), lambda: self.questions.choose_basis(0)),),
        )

    def _show(self) -> None:
        found = self._found
        if found is None:
            return
        if isinstance(found, Refused):
            self.show_empty(
                f"{found.sentence[:1].upper()}{found.sentence[1:]}.",
                _("Compare in another way, or change the plan."),
                (Offer(_("Same light and coils"), lambda: self.questions.choose_basis(1)),),
            )
            return
        judged = tuple(self._with_evaporation(row) for row in found.answer.rows)
        passing = [row for row in judged if self.rules.sieve.passes(row)]
        weights = self.rules.weights
        scores = score_rows(passing, weights)
        name = self._order_name
        if name:
            values = [score.value for score in scores] if name == SCORE else [row.cell(name).value for row in passing]
            places = order_by(values, self.descending)
        else:
            places = tuple(range(len(passing)))
        self._rows = tuple(passing[place] for place in places)
        self._scores = tuple(scores[place] for place in places)
        units = {
            name: unit_for_column(name, [row.cell(name) for row in self._rows], self._units.get(name, ""))
            for name in {*self.names, *({name} - {"", SCORE})}
        }
        shown = Shown(
            rows=self._rows,
            scores=self._scores,
            weights=weights,
            names=self.names,
            units=units,
            own=own_of(found.plan),
        )
        self.table.show_rows(shown, name, self.descending)
        self.view.show_order(self.names, bool(weights), name)
        self.choices.evaporate.setEnabled(any(not hopeless(row) and row.evaporation is None for row in self._rows))
        if self.view.view == 1:
            ranked_by = name or self.names[0]
            descending = self.descending if name else COLUMNS[ranked_by].more_is_better
            picture = self._pictures.ranking(shown, ranked_by, descending)
        else:
            picture = self._pictures.thresholds(self._rows, found.plan)
        self.plot.canvas.set_stale(False)
        self.show_plot(lambda: picture, heading(found.answer, found.plan), summary(judged, len(self._rows)))

    def _with_evaporation(self, row: CandidateRow) -> CandidateRow:
        found = self._evaporations.get(evaporation_key(row.plan))
        return row if found is None else replace(row, evaporation=found)

    @property
    def names(self) -> tuple[str, ...]:
        """The columns on show."""
        return self.choices.names

    @property
    def _order_name(self) -> str:
        """What rows are ordered by: the user's choice, the score where there are weights, else nothing."""
        if self.sorted_by == SCORE and not self.rules.weights:
            return ""
        return self.sorted_by or (SCORE if self.rules.weights else "")

    def _read_pointer(self, place: tuple[float, float] | None) -> None:
        if place is None:
            self.bar.status.say(HINT)
            return
        text = self.pointer_text(self.plot, place)
        near = self._pictures.threshold_text(place) if self.view.view == 0 else ""
        self.bar.status.say(f"{text}   {near}" if near else text)

    def _explain(self, text: str) -> None:
        self.explanation.show_text(text or _NO_CELL)
        self.bar.status.say(text.split("\n")[0])

    # ---------------------------------------------------------------- what is shown of the answer, and how

    def _choose_view(self, place: int) -> None:
        self.lower_half.setCurrentIndex(1 if place == 2 else 0)
        if place != 2:
            self.plot.set_view(None)
            self._show()

    def sort_by(self, name: str) -> None:
        """Order by a column; by the one that orders already, the other way round."""
        if name == self._order_name:
            self.descending = not self.descending
            self.sorted_by = name
            self._ordered()
        else:
            self._order(name)

    def _order(self, name: str) -> None:
        """Order by a column, the better end first."""
        self.sorted_by = name
        self.descending = COLUMNS[name].more_is_better if name in COLUMNS else True
        self._ordered()

    def _ordered(self) -> None:
        if self.view.view == 1:
            self.plot.set_view(None)
        self.memory_changed.emit()
        self._show()

    def _choose_unit(self, name: str, unit: str) -> None:
        self._units[name] = unit
        self.unit_chosen.emit(name, unit)
        self._show()

    def choose_columns(self, names: Sequence[str]) -> None:
        """Show these columns."""
        self.choices.names = tuple(dict.fromkeys(name for name in names if name in COLUMNS)) or USUAL_COLUMNS
        self.memory_changed.emit()
        self._show()

    def _rules_changed(self) -> None:
        self._count_rules()
        self.memory_changed.emit()
        self._show()

    def _count_rules(self) -> None:
        sieve = self.rules.sieve
        self.choices.count_rules(len(sieve.traits) + len(sieve.bounds), len(self.rules.weights))

    def ask_evaporation(self) -> None:
        """Work out the best evaporation of the rows on show."""
        self._evaporating = tuple(row for row in self._rows if row.evaporation is None)
        for name in ("evaporated_atoms", "evaporation_time"):
            if name not in self.names:
                self.choices.names = (*self.names, name)
        self.part_allowed.emit()

    # ---------------------------------------------------------------- for the window

    def csv(self) -> str:
        """The table, numbers in SI with how sure each is."""
        return candidates_csv(self._rows, self.names, self._scores)

    def take_focus(self) -> None:
        if self.is_empty:
            self.empty.take_focus()
        else:
            self.table.take_focus()
