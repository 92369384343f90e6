"""The Field page: the scattering length against magnetic field, and the present field on it, to be dragged."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import partial
from typing import Any

from PySide6.QtWidgets import QWidget

from app.engine import CloudAnswer, TuningAnswer, tuning_answer, usual_fields
from app.figures.picture import Picture
from app.figures.theme import Theme
from app.figures.tuning import GAUSS, length_there, tuning_picture, with_field
from app.moving import fine_step, moved_quantity
from app.newest import Job
from app.plan import Plan
from app.tuning_words import data_sentence, field_text, length_sentence, no_curve_sentences, sources_text
from app.units import MAGNETIC_FIELD, Quantity
from app.widgets.banner import Offer
from app.widgets.form import plan_with_entry
from app.widgets.single_plot_page import SinglePlotPage

HINT = "Drag the field along the curve, or double-click where it should be"
HINT_WITHOUT = "Double-click where the field should be, or type it"
_STEP = "magnetic field"
_NO_FIELD = Quantity("0 G", 0.0)
_Fields = tuple[float, float]


@dataclass(frozen=True, eq=False)
class _Ground:
    """The curve without the field; `depends_on` is all that it was made from."""

    depends_on: object
    answer: TuningAnswer
    picture: Picture | None


class FieldPage(SinglePlotPage):
    title = "Field"
    plot_name = "Scattering length against magnetic field"

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(theme, parent)
        self._ground: _Ground | None = None
        self._fields: _Fields | None = None
        self._gas: object = None  # what the fields were chosen for
        self._drag = 0
        canvas = self.plot.canvas
        canvas.mark_dragged.connect(self._drag_to)
        canvas.mark_released.connect(self._end_drag)
        canvas.double_clicked.connect(lambda field, _length: self._move(field * GAUSS, ""))
        canvas.pointer_moved.connect(self._read_pointer)
        self.plot.view_changed.connect(self.part_wanted)

    # ---------------------------------------------------------------- showing

    def part(self, plan: Plan) -> Job | None:
        cloud, fields = self.cloud, self._wanted_fields(plan)
        depends_on = _what_a_curve_depends_on(plan, fields)
        if cloud is None or (self._ground is not None and self._ground.depends_on == depends_on):
            return None

        def job() -> _Ground:
            answer = tuning_answer(plan, fields)
            return _Ground(depends_on, answer, None if answer.curve is None else tuning_picture(answer, cloud))

        return job

    def take_part(self, answer: Any) -> None:
        self._ground = answer
        if self.cloud is not None:
            self._show(self.cloud)

    def show_cloud(self, cloud: CloudAnswer) -> None:
        super().show_cloud(cloud)
        if self.isVisible():
            self._show(cloud)

    def _show(self, cloud: CloudAnswer) -> None:
        """The cloud's field on the curve of its state; a cloud of another state waits for its curve."""
        ground = self._ground
        if ground is None or ground.depends_on != _what_a_curve_depends_on(cloud.plan, self._wanted_fields(cloud.plan)):
            return
        if ground.picture is None:
            self.show_empty(*no_curve_sentences(ground.answer, cloud), self._offers(ground.answer))
            return
        if not self.plot.canvas.underMouse():
            self._read_pointer(None)
        self.detail.setToolTip(sources_text(ground.answer))
        self.show_plot(partial(with_field, ground.picture, cloud), length_sentence(cloud), data_sentence(ground.answer))

    def _offers(self, answer: TuningAnswer) -> tuple[Offer, ...]:
        return tuple(Offer(f"Use {state.name}", partial(self._use_state, state.name)) for state in answer.tunable)

    def _use_state(self, name: str) -> None:
        if self.cloud is not None:
            self.plan_edited.emit(plan_with_entry(self.cloud.plan, "species.state", name), "state", "")

    def _wanted_fields(self, plan: Plan) -> _Fields | None:
        """What the user asked to see; else the range that was shown, while the field lies in it."""
        gas, field = (plan.species.key, plan.species.state), plan.species.field
        if gas != self._gas:
            # What was looked at closely in another state's curve is nothing to look for in this one.
            self._gas, self._fields, self.plot.view = gas, None, None
        view, held = self.plot.view, self._fields
        if view is not None and view[1] > 0.0:
            return max(0.0, view[0] * GAUSS), view[1] * GAUSS
        if held is None or (field is not None and not held[0] <= field.value <= held[1]):
            self._fields = usual_fields(plan)
        return self._fields

    # ---------------------------------------------------------------- moving the field

    def _drag_to(self, _mark: int, field: float, _length: float) -> None:
        self._move(field * GAUSS, f"field drag {self._drag}")

    def _end_drag(self, mark: int, field: float, length: float) -> None:
        self._drag_to(mark, field, length)
        self._drag += 1

    def _move(self, field: float, merge_key: str) -> None:
        """Set the field; a typed length would override it and goes."""
        if self.cloud is None or not self.plot.ready:
            return
        axis = self.plot.picture().x
        plan = self.cloud.plan
        moved = moved_quantity(
            plan.species.field or _NO_FIELD,
            field,
            MAGNETIC_FIELD,
            (),
            step=fine_step((axis.high - axis.low) * GAUSS),
            relative=False,
        )
        species = replace(plan.species, field=moved, scattering_length=None)
        self.plan_edited.emit(replace(plan, species=species), _STEP, merge_key)

    def _read_pointer(self, place: tuple[float, float] | None) -> None:
        ground = self._ground
        if place is None or ground is None or ground.answer.curve is None:
            given = self.cloud is not None and self.cloud.plan.species.field is not None
            self.bar.status.say(HINT if given else HINT_WITHOUT)
            return
        field = place[0] * GAUSS
        length = length_there(ground.answer, field)
        self.bar.status.say(
            f"B = {field_text(field)}   " + (f"a = {length}" if length else "the data say nothing here")
        )


def _what_a_curve_depends_on(plan: Plan, fields: _Fields | None) -> object:
    return plan.species.key, plan.species.state, fields
