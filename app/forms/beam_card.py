"""A beam of the Trap form: a card that folds, with its numbers, its switch and what can be done with it."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from functools import partial

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QWidget

from app.forms.vector_field import DirectionField, along_text
from app.plan import BEAM_FIELDS, BeamChoice, Plan, PlanError
from app.trap_choices import require_name
from app.trap_edits import with_beam
from app.units import Quantity
from app.widgets.card import bring_into_view
from app.widgets.entry_field import EntryField
from app.widgets.folding_form import FoldingForm

_NAME, _WAIST, _SECOND = "name", "waist", "second waist"


class BeamCard(FoldingForm):
    """Shows the beam of one name, and edits it. Signals: duplicate_wanted(name), move_wanted(name, step),
    removal_wanted(name), for the form that holds the cards."""

    duplicate_wanted = Signal(str)
    move_wanted = Signal(str, int)
    removal_wanted = Signal(str)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__("Beam", parent, switch=True)
        self.beam: BeamChoice | None = None
        self.wavelength = self.add_quantity(BEAM_FIELDS["wavelength"], "", put=self._put("wavelength"))
        self.power = self.add_quantity(BEAM_FIELDS["power"], "", put=self._put("power"))
        self.waist = self.add_quantity(BEAM_FIELDS["waist"], "", key=_WAIST, put=self._put_waist)
        self.second_waist = self.add_quantity(
            BEAM_FIELDS["waists"], "", label="Vertical waist", key=_SECOND, put=self._put_second_waist
        )
        self.second_waist.setPlaceholderText("the same")
        direction = BEAM_FIELDS["direction"]
        self.direction = DirectionField(direction)
        self.add_entry("direction", direction.label, "", self.direction, direction.tip, self._put("direction"))
        x, y, z = (partial(self._put_focus, axis) for axis in range(3))
        self.focus = self.add_place(BEAM_FIELDS["focus"], "focus", (x, y, z))
        self.m2 = self.add_quantity(BEAM_FIELDS["m2"], "", put=self._put("m2"))
        self.m2.setPlaceholderText("1, ideal")
        self.name_field = EntryField(_read_name)
        name = BEAM_FIELDS["name"]
        self.add_entry(_NAME, name.label, "", self.name_field, name.tip, self._put("name"))
        self._fill_menu()
        self.head.switched.connect(self._switch)
        self.set_unfolded(False)

    def _fill_menu(self) -> None:
        def send(signal: object, *rest: object) -> Callable[[], None]:
            return lambda: signal.emit(self.name, *rest)  # type: ignore[attr-defined]

        head = self.head
        head.add_action("Re&name", self.rename, keys="F2", card=self)
        head.add_action("&Duplicate", send(self.duplicate_wanted), keys="Ctrl+D", card=self)
        self._up = head.add_action("Move &up", send(self.move_wanted, -1), keys="Alt+Up", card=self)
        self._down = head.add_action("Move do&wn", send(self.move_wanted, 1), keys="Alt+Down", card=self)
        head.menu.addSeparator()
        head.add_action("&Remove", send(self.removal_wanted), card=self)

    # ---------------------------------------------------------------- showing

    @property
    def name(self) -> str:
        return "" if self.beam is None else self.beam.name

    def summary_text(self) -> str:
        return "" if self.beam is None else summary(self.beam)

    def show_beam(self, plan: Plan, beam: BeamChoice) -> None:
        """The beam of the plan that this card is for."""
        self.beam = beam
        place = plan.trap.beams.index(beam)
        self._up.setEnabled(place > 0)
        self._down.setEnabled(place < len(plan.trap.beams) - 1)
        self.setAccessibleName(f"Beam {beam.name}")
        self.set_owner(f" of beam {beam.name}")
        self.set_plan(plan)

    def show_plan(self, plan: Plan) -> None:
        beam = self.beam
        assert beam is not None
        self.head.set_title(beam.name)
        self.head.switch.setChecked(beam.on)
        self.head.fold.setProperty("off", not beam.on)
        self.head.fold.style().polish(self.head.fold)
        self.name_field.set_value(beam.name)
        self.wavelength.set_quantity(beam.wavelength)
        self.power.set_quantity(beam.power)
        self.waist.set_quantity(beam.waists[0])
        self.second_waist.set_quantity(beam.waists[1] if len(beam.waists) == 2 else None)
        self.direction.set_value(beam.direction)
        for field, place in zip(self.focus, beam.focus, strict=True):
            field.set_quantity(place)
        self.m2.set_quantity(beam.m2)
        self.refuse("")
        self._show_summary()

    def rename(self) -> None:
        """Give the keyboard to the name."""
        self.set_unfolded(True)
        self.name_field.setFocus(Qt.FocusReason.OtherFocusReason)
        self.name_field.selectAll()
        bring_into_view(self.name_field)

    # ---------------------------------------------------------------- edits

    def _put(self, name: str) -> Callable[[Plan, object], Plan]:
        return lambda plan, value: self._changed_beam(plan, **{name: value})

    def _changed_beam(self, plan: Plan, **changes: object) -> Plan:
        beam = plan.trap.beam(self.name)
        return with_beam(plan, beam.name, replace(beam, **changes))  # type: ignore[arg-type]

    def _put_waist(self, plan: Plan, waist: Quantity | None) -> Plan:
        if waist is None:
            raise PlanError("a beam needs a waist")
        beam = plan.trap.beam(self.name)
        return self._changed_beam(plan, waists=(waist, *beam.waists[1:]))

    def _put_second_waist(self, plan: Plan, waist: Quantity | None) -> Plan:
        first = plan.trap.beam(self.name).waists[0]
        return self._changed_beam(plan, waists=(first,) if waist is None else (first, waist))

    def _put_focus(self, axis: int, plan: Plan, place: Quantity | None) -> Plan:
        if place is None:
            raise PlanError("a focus needs three places")
        focus = list(plan.trap.beam(self.name).focus)
        focus[axis] = place
        return self._changed_beam(plan, focus=tuple(focus))

    def _switch(self, on: bool) -> None:
        if self._plan is not None:
            what = f"beam {self.name}, {'on' if on else 'off'}"
            self.plan_edited.emit(self._changed_beam(self._plan, on=on), what, "")


def summary(beam: BeamChoice) -> str:
    """A beam in a line."""
    waists = " × ".join(waist.text.replace("um", "µm") for waist in beam.waists)
    return f"{beam.wavelength.text}, {beam.power.text}, {waists}, {along_text(beam.direction)}"


def _read_name(text: str) -> str:
    name = text.strip()
    require_name(name)
    return name
