"""A ramp designed for most atoms at the target: what limits it, what the choice costs, and putting it into the plan."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial
from typing import TYPE_CHECKING, Any

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QCheckBox, QGridLayout, QHBoxLayout, QLabel, QPushButton, QVBoxLayout, QWidget

from app.answers.ramp_design import DesignAnswer, controls_of, usual_control
from app.answers.ramp_jobs import design_job
from app.control_kinds import CONTROL_KINDS, SPEED_KINDS
from app.design_words import bound_text, design_sentence
from app.figures.ramp_tradeoff import eta_picture, time_picture
from app.figures.theme import Theme
from app.newest import Steps
from app.plan import PLAN_FIELDS, Plan
from app.ramp_advice import assumed_depth
from app.ramp_edits import with_known_depth
from app.ramp_limits import limits_for, with_bound, with_longest_time
from app.ramp_words import ramp_verdict
from app.units import DURATION, Kind, Quantity
from app.widgets.form import Choice, plan_with_entry
from app.widgets.plan_editor import PlanEditor
from app.widgets.plot import Plot
from physics.ramps import Control

if TYPE_CHECKING:
    from app.answers.ramp import RampAnswer

_TARGETS = {
    "target.peak_phase_space_density": "D",
    "target.reduced_temperature": "T/Tc or T/TF",
    "target.condensate_atoms": "condensate atoms",
}
_MOST_BOUNDS = 4
_INTRO = (
    "Chooses the truncation parameter η = U/kT, held or drifting with the depth, and with it the time, so that most "
    "atoms reach the target within these limits. The result becomes ordinary stages."
)


class DesignView(PlanEditor):
    """Signals: wanted() when a design is asked for; applied(Plan) with the plan that has the designed ramp."""

    wanted = Signal()

    def __init__(self, add_plot: Callable[[str], Plot], parent: QWidget | None = None) -> None:
        super().__init__(lambda plan: plan, parent)
        self.setAccessibleName("Design of a ramp")
        self._asked = False
        self._found: DesignAnswer | None = None
        self._found_for: object = None
        self.since: str | None = None  # label of the measured cloud from which the rest is designed
        self._controls: tuple[Control, ...] = ()
        self._picked: Control | None = None
        self._limit_fields: QWidget | None = None
        self.intro = QLabel(_INTRO)
        self.intro.setObjectName("plotStatus")
        self.intro.setWordWrap(True)
        self.control = Choice()
        self.control.setAccessibleName("Control of the designed ramp")
        self.control.activated.connect(self._pick_control)
        self.target = Choice()
        self.target.setAccessibleName("Sort of target")
        for name in _TARGETS.values():
            self.target.addItem(name)
        self.target.activated.connect(self._pick_target)
        self.time = self.add_field(
            DURATION, "Longest time", lambda plan: plan.limits.time, with_longest_time, "limits time", optional=True,
            tip="The whole ramp takes no longer",
        )  # fmt: skip
        self.time.setPlaceholderText("any")
        self.targets = {}
        for path in _TARGETS:
            field = PLAN_FIELDS[path]
            assert isinstance(field.kind, Kind)
            line = self.add_field(
                field.kind, field.label, partial(_entry, path), partial(_put_entry, path), path, optional=True,
                tip=field.tip,
            )  # fmt: skip
            self.targets[path] = line
        self.drift = QCheckBox("η may drift with the depth")
        self.drift.setChecked(True)
        self.drift.setToolTip("Else one truncation parameter is held throughout")
        self.go = QPushButton("Design")
        self.go.clicked.connect(self.ask)
        self.apply = QPushButton("Put it into the plan")
        self.apply.setToolTip("The designed stages in the place of those of the plan; undo takes them back")
        self.apply.clicked.connect(self._apply)
        self.sentence, self.detail = QLabel(), QLabel()
        self.detail.setObjectName("plotStatus")
        for label in (self.sentence, self.detail):
            label.setWordWrap(True)
            label.setTextInteractionFlags(
                Qt.TextInteractionFlag.TextSelectableByMouse | Qt.TextInteractionFlag.TextSelectableByKeyboard
            )
        self.plots = (add_plot("Atoms left against truncation parameter"), add_plot("Atoms left against time"))
        self._lay_out_all()
        self._show_found()

    def _lay_out_all(self) -> None:
        self._form = QGridLayout()
        self._form.setHorizontalSpacing(10)
        self._form.setVerticalSpacing(4)
        target = QWidget()
        row = QHBoxLayout(target)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(6)
        row.addWidget(self.target, 1)
        for line in self.targets.values():
            row.addWidget(line, 1)
        self._add(0, 0, "Move", self.control)
        self._add(0, 2, "Until", target)
        self._add(1, 0, "Longest time", self.time)
        self._form.addWidget(self.drift, 2, 1)
        self._form.addWidget(self.go, 2, 3, Qt.AlignmentFlag.AlignLeft)
        self._form.setColumnStretch(1, 2)
        self._form.setColumnStretch(3, 3)
        plots = QHBoxLayout()
        plots.setContentsMargins(0, 0, 0, 0)
        plots.setSpacing(0)
        for plot in self.plots:
            plot.canvas.setMinimumHeight(150)
            plots.addWidget(plot.canvas, 1)
        texts = QVBoxLayout()
        texts.setContentsMargins(14, 4, 14, 4)
        texts.setSpacing(6)
        texts.addWidget(self.intro)
        texts.addLayout(self._form)
        texts.addWidget(self.error)
        result = QHBoxLayout()
        result.addWidget(self.sentence, 1)
        result.addWidget(self.apply, 0, Qt.AlignmentFlag.AlignTop)
        texts.addLayout(result)
        texts.addWidget(self.detail)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(0)
        column.addLayout(texts)
        column.addLayout(plots, 1)
        self._rest = QWidget()
        column.addWidget(self._rest, 1)

    def _add(self, row: int, column: int, text: str, widget: QWidget) -> None:
        label = QLabel(text)
        label.setBuddy(widget)
        self._form.addWidget(label, row, column)
        self._form.addWidget(widget, row, column + 1)

    # ---------------------------------------------------------------- showing

    def lay_out(self, plan: Plan) -> None:
        """The control's limits, in its own units, and the target's field."""
        try:
            controls = controls_of(with_known_depth(plan), self.since)
            usual = usual_control(with_known_depth(plan), self.since)
        except ValueError as error:
            self.say(as_sentence(error))
            controls, usual = (), None
        if controls != self._controls:
            self._controls = controls
            self.control.clear()
            for control in controls:
                self.control.addItem(control.label)
        if self._picked not in controls:
            self._picked = usual
        if self._picked is not None and self._limit_fields is None:
            self._make_limit_fields(self._picked)
        if self._picked in controls:
            self.control.setCurrentIndex(controls.index(self._picked))
        self.go.setEnabled(bool(controls))
        given = next((path for path in _TARGETS if _entry(path, plan) is not None), None)
        if given is not None:
            self.target.setCurrentIndex(list(_TARGETS).index(given))
        self._show_target_field()
        self._show_found()

    def _show_target_field(self) -> None:
        chosen = list(_TARGETS)[max(self.target.currentIndex(), 0)]
        for path, line in self.targets.items():
            line.setVisible(path == chosen)
        assumed = {"target.peak_phase_space_density": "2.612", "target.reduced_temperature": "0.5"}
        self.targets[chosen].setPlaceholderText(assumed.get(chosen, ""))

    def _make_limit_fields(self, control: Control) -> None:
        """Fields for the bounds of a control; those of another one go."""
        old, self._limit_fields = self._limit_fields, QWidget()
        row = QHBoxLayout(self._limit_fields)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(6)
        kinds = {"low": CONTROL_KINDS, "high": CONTROL_KINDS, "fastest": SPEED_KINDS}
        words = {"low": "lowest", "high": "highest", "fastest": "fastest"}
        for name, table in kinds.items():
            field = self.add_field(
                table[control.knob], f"{words[name]} {control.label}", partial(_bound, control, name),
                partial(_put_bound, control, name), f"limits {control.label} {name}", optional=True,
            )  # fmt: skip
            field.setPlaceholderText(words[name])
            row.addWidget(field, 1)
        self._add(1, 2, "Control within", self._limit_fields)
        if old is not None:
            old.hide()
            old.deleteLater()

    def _pick_control(self, index: int) -> None:
        if self._plan is None:
            return
        self._picked = self._controls[index]
        # Fills of fields that go would be called on what is deleted: all are made anew.
        self._fills = [fill for fill in self._fills if fill not in self._bound_fills]
        self._make_limit_fields(self._picked)
        self.set_plan(self._plan)

    @property
    def _bound_fills(self) -> list[Callable[[Plan], None]]:
        return self._fills[1 + len(_TARGETS) :]

    def _pick_target(self, index: int) -> None:
        """Another sort of target: the one that was given goes, until a value is typed."""
        if self._plan is None:
            return
        wanted = list(_TARGETS)[index]
        plan = self._plan
        for path in _TARGETS:
            if path != wanted and _entry(path, plan) is not None:
                plan = plan_with_entry(plan, path, None)
        self._show_target_field()
        if plan != self._plan:
            self.edit(lambda _plan: plan, "target")
            self.target.setCurrentIndex(index)
            self._show_target_field()
        self.targets[wanted].setFocus()

    def _show_found(self) -> None:
        found = self._found
        self.plots[0].canvas.setVisible(found is not None)
        self.plots[1].canvas.setVisible(found is not None and len(found.design.trade_off.times) > 1)
        self._rest.setVisible(found is None)
        self.apply.setVisible(found is not None)
        self.sentence.setVisible(bool(self.sentence.text()))
        self.detail.setVisible(bool(self.detail.text()))
        if found is not None and self._plan is not None:
            stale = self._found_for != _depends_on(self._plan)
            for plot in self.plots:
                plot.canvas.set_stale(stale, "of the plan before")

    # ---------------------------------------------------------------- designing

    def ask(self) -> None:
        """Design a ramp for the present plan."""
        self._asked = True
        self.sentence.setText("")
        self.detail.setText("")
        self.wanted.emit()

    def extra_job(self, plan: Plan) -> tuple[Steps | None, object]:
        if not self._asked or self._picked is None:
            return None, None
        drift = self.drift.isChecked()
        job = design_job(with_known_depth(plan), self._picked, self.since, drift=drift)
        return job, ("design", self._picked, self.since, drift)

    def take_extra(self, plan: Plan, extra: Any) -> None:
        self._asked = False
        if isinstance(extra, Exception):
            self.sentence.setText(as_sentence(extra))
            self.detail.setText("")
        elif isinstance(extra, DesignAnswer):
            self._found, self._found_for = extra, _depends_on(plan)
            self.sentence.setText(" ".join((design_sentence(extra), assumed_depth(plan))).strip())
            self.detail.setText(_result_text(extra.answer, extra))
            for plot, make in zip(self.plots, (eta_picture, time_picture), strict=True):
                plot.show(partial(make, extra.design))
        self._show_found()

    def start_from(self, label: str | None) -> None:
        """Design the rest of the ramp from a measured cloud; None: the whole of it."""
        self.since = label
        self.go.setText("Design" if label is None else f"Design the rest from “{label}”")
        if self._plan is not None:
            self.set_plan(self._plan)

    def stopped(self) -> None:
        """The user does not want it any more."""
        self._asked = False

    def _apply(self) -> None:
        found = self._found
        if found is not None:
            self.edit(lambda plan: found.plan(with_known_depth(plan)), "ramp")

    def set_theme(self, theme: Theme) -> None:
        """The plots are the page's."""

    def take_focus(self) -> None:
        self.go.setFocus()


def as_sentence(error: Exception) -> str:
    """What an error says, as a sentence on the screen."""
    text = str(error)
    return f"{text[:1].upper()}{text[1:]}."


def _result_text(answer: RampAnswer, found: DesignAnswer) -> str:
    bounds = [bound_text(bound, gain) for bound, gain in found.design.bounds[:_MOST_BOUNDS]]
    binds = f"What binds: {'; '.join(bounds)}." if bounds else ""
    return " ".join(part for part in (ramp_verdict(answer), binds) if part)


def _depends_on(plan: Plan) -> object:
    """What a design depends on, the ramp that it replaces apart."""
    return plan.species, plan.trap, plan.cloud, plan.losses, plan.target, plan.limits


def _entry(path: str, plan: Plan) -> Quantity | None:
    field = PLAN_FIELDS[path]
    found: Quantity | None = getattr(getattr(plan, field.section), field.name)
    return found


def _put_entry(path: str, plan: Plan, value: Quantity | None) -> Plan:
    return plan_with_entry(plan, path, value)


def _bound(control: Control, name: str, plan: Plan) -> Quantity | None:
    found: Quantity | None = getattr(limits_for(plan, control), name)
    return found


def _put_bound(control: Control, name: str, plan: Plan, value: Quantity | None) -> Plan:
    return with_bound(plan, control, name, value)
