"""The Models page: the cloud by every model that could describe it, in a table and a plot."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QWidget

from app.engine import ModelsAnswer, models_answer
from app.figures.models import models_picture
from app.figures.theme import Theme
from app.language import translate as _
from app.model_words import MEANING, cells_of, headings_of, interaction_sentence, spread_sentence
from app.newest import Job, Steps, Watch
from app.plan import Plan
from app.widgets.fact_table import FactRow, FactTable
from app.widgets.form import plan_with_entry
from app.widgets.single_plot_page import SinglePlotPage
from physics.models import Model

HINT = "Double-click a model in the table to use it"
PATIENCE_MS = 150
"""What is there is shown after that time, and the rest follows: sooner, texts would only flicker."""


@dataclass(frozen=True, eq=False)
class _Found:
    """The models, so far as they are done; `depends_on` is all that they were made from."""

    depends_on: object
    answer: ModelsAnswer


class ModelsPage(SinglePlotPage):
    title = "Models"
    plot_name = "Models compared"

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(theme, parent)
        self.table = FactTable("Models compared")
        self.table.setToolTip(HINT)
        self.table.setWhatsThis(HINT)
        self.table.chosen.connect(self._use)
        self.options.addWidget(self.table)
        self.bar.status.say(HINT)
        self._found: _Found | None = None
        self._soon = QTimer(self, singleShot=True, interval=PATIENCE_MS)
        self._soon.timeout.connect(self._show)
        self.plot.canvas.pointer_moved.connect(
            lambda place: self.bar.status.say(self.pointer_text(self.plot, place) or HINT)
        )

    def part(self, plan: Plan) -> Job | None:
        depends_on = _what_models_depend_on(plan)
        found = self._found
        if found is not None and found.depends_on == depends_on and found.answer.complete:
            return None

        def in_steps(watch: Watch) -> _Found | None:
            answer = models_answer(plan, lambda answer: watch.deliver(_Found(depends_on, answer)), watch.tell)
            return None if answer is None else _Found(depends_on, answer)

        return Steps(what=_("other models"), depends_on=(self.title, depends_on), run=in_steps)

    def take_part(self, answer: Any) -> None:
        self._found = answer
        if answer.answer.complete:
            self._show()
        elif not self._soon.isActive():
            self._soon.start()

    def show_end(self, *, stopped: bool) -> None:
        super().show_end(stopped=stopped)
        if stopped and self._found is not None:
            self._show()

    def _show(self) -> None:
        self._soon.stop()
        if self._found is None or self.cloud is None:
            return
        answer = self._found.answer
        headings = ("", *headings_of(answer))
        self.table.show_rows(headings, [_fact_row(answer, model) for model in answer.models])
        self.show_plot(lambda: models_picture(answer), spread_sentence(answer), interaction_sentence(self.cloud))

    def _use(self, name: str) -> None:
        """Describe the cloud by this model from now on."""
        if self.cloud is not None:
            self.plan_edited.emit(plan_with_entry(self.cloud.plan, "cloud.model", Model(name)), "model", "")


def _fact_row(answer: ModelsAnswer, model: Model) -> FactRow:
    return FactRow(
        name=model.label, cells=cells_of(answer, model), tip=MEANING[model], in_use=model is answer.present
    )  # fmt: skip


def _what_models_depend_on(plan: Plan) -> object:
    return plan.species, plan.trap, plan.cloud
