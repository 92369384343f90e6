"""Clouds to aim at along a ramp: a table to print and to copy, and what follows if a cloud is off."""

from __future__ import annotations

import csv
import io
import math
from collections.abc import Sequence
from typing import Any

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QGridLayout, QHBoxLayout, QLabel, QPushButton, QVBoxLayout, QWidget

from app.answers.ramp_jobs import departures_job, ramp_depends_on
from app.answers.waypoints import EXPANSION_TIME, DeparturesAnswer, WaypointsAnswer, errors_at, waypoints_answer
from app.figures.theme import Theme
from app.kinds import PHASE_SPACE_DENSITY, TIME, Kind
from app.newest import Steps, Watch
from app.plan import Plan
from app.ramp_advice import assumed_depth
from app.ramp_edits import with_known_depth
from app.ramp_words import control_text, duration
from app.units import Quantity, best_unit, format_quantity, read_quantity
from app.widgets.entry_field import EntryField
from app.widgets.fact_table import FactRow, FactTable
from app.widgets.quantity_field import QuantityField
from app.widgets.scrolled import fill_scrolled
from app.words import number, percent, temperature
from physics.particles import Statistics
from physics.ramps import Control
from physics.species import State
from physics.waypoints import Departure, PassengerThen

RELATIVE_ERROR = Kind(name="relative error", si_unit="", units=("%", ""), low=0.0, high=0.9, example="10 %")
_CHOOSE = "Choose a waypoint to see what follows if N or T is off there."
_NONE = "No waypoint: the ramp does not pass any of these phase-space densities."


class WaypointsView(QWidget):
    """Signals: wanted() when other waypoints are asked for; saved(str) with the table as CSV text; printed(str, str)
    with title and table as HTML."""

    wanted = Signal()
    save_asked = Signal()
    print_asked = Signal()

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setAccessibleName("Waypoints")
        self._plan: Plan | None = None
        self._found: WaypointsAnswer | None = None
        self._found_for: object = None
        self._departures_for: object = None
        self._departures: DeparturesAnswer | None = None
        self._chosen: float | None = None
        self._densities: tuple[float, ...] = ()
        self.densities = EntryField(_read_densities, _write_densities)
        self.densities.setAccessibleName("Phase-space densities")
        self.densities.set_value(())
        self.densities.setPlaceholderText("decades, and the highest")
        self.densities.entered.connect(self._take_densities)
        self.time = QuantityField(TIME, "Expansion time", tip="After which the widths are given")
        self.time.set_quantity(Quantity("15 ms", EXPANSION_TIME))
        self.time.changed.connect(lambda _value: self.wanted.emit())
        self.atoms_error = QuantityField(RELATIVE_ERROR, "N off by", optional=True)
        self.temperature_error = QuantityField(RELATIVE_ERROR, "T off by", optional=True)
        for field in (self.atoms_error, self.temperature_error):
            field.changed.connect(lambda _value: self.wanted.emit())
            field.setMaximumWidth(90)
        self.table = FactTable("Waypoints")
        self.table.itemSelectionChanged.connect(self._choose)
        self.sentence, self.error = QLabel(), QLabel()
        self.sentence.setObjectName("plotStatus")
        self.error.setObjectName("fieldError")
        self.off = FactTable("What follows if a cloud is off")
        for label in (self.sentence, self.error):
            label.setWordWrap(True)
            label.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self.error.hide()
        for wrong in (self.densities, self.time, self.atoms_error, self.temperature_error):
            wrong.error_changed.connect(self._show_error)
        self._lay_out()

    def _lay_out(self) -> None:
        form = QGridLayout()
        form.setHorizontalSpacing(10)
        for place, (text, field) in enumerate((("At D =", self.densities), ("widths after", self.time))):
            label = QLabel(text)
            label.setBuddy(field)
            form.addWidget(label, 0, 2 * place)
            form.addWidget(field, 0, 2 * place + 1)
        form.setColumnStretch(1, 3)
        form.setColumnStretch(3, 1)
        buttons = QHBoxLayout()
        buttons.setSpacing(8)
        self.copy, self.save, self.print = QPushButton("Copy"), QPushButton("Save CSV…"), QPushButton("Print…")
        self.copy.setToolTip("The table as tab-separated text")
        self.copy.clicked.connect(self.table.copy)
        self.save.clicked.connect(self.save_asked)
        self.print.clicked.connect(self.print_asked)
        for button in (self.copy, self.save, self.print):
            buttons.addWidget(button)
        buttons.addStretch(1)
        for text, line in (("if N is off by", self.atoms_error), ("or T by", self.temperature_error)):
            label = QLabel(text)
            label.setBuddy(line)
            buttons.addWidget(label)
            buttons.addWidget(line)
        body = QWidget()
        column = QVBoxLayout(body)
        column.setContentsMargins(14, 4, 10, 6)
        column.setSpacing(8)
        column.addLayout(form)
        column.addWidget(self.error)
        column.addWidget(self.table)
        column.addLayout(buttons)
        column.addWidget(self.sentence)
        column.addWidget(self.off)
        column.addStretch(1)
        fill_scrolled(self, body)

    # ---------------------------------------------------------------- answers

    def set_plan(self, plan: Plan) -> None:
        self._plan = plan
        self._show_stated_errors(plan)

    def extra_job(self, plan: Plan) -> tuple[Steps | None, object]:
        key = self._key(plan)
        errors = self._errors()
        off_key = None if self._chosen is None or not plan.ramp else (key, self._chosen, errors)
        if self._found_for == key and self._departures_for == off_key:
            return None, None
        time = self.time.quantity.value if self.time.quantity is not None else EXPANSION_TIME
        densities, chosen = self._densities, self._chosen

        def run(watch: Watch) -> Any:
            found = waypoints_answer(plan if plan.ramp else with_known_depth(plan), densities, time)
            point = next((p for p in found.points if p.phase_space_density == chosen), None)
            off = None
            if off_key is not None and point is not None:
                off = departures_job(plan, point, errors).run(watch)
                if off is None:
                    return None
            return found, key, off, off_key

        return Steps(what="waypoints", depends_on=(key, off_key), run=run), ("waypoints", key, off_key)

    def _key(self, plan: Plan) -> object:
        return ramp_depends_on(plan), self._densities, self.time.quantity

    def _errors(self) -> tuple[float, float] | None:
        """Relative errors that were typed; None: those that the plan states."""
        atoms, kelvin = self.atoms_error.quantity, self.temperature_error.quantity
        if atoms is None and kelvin is None:
            return None
        return (0.0 if atoms is None else atoms.value, 0.0 if kelvin is None else kelvin.value)

    def take_extra(self, plan: Plan, extra: Any) -> None:
        if isinstance(extra, Exception):
            self._found, self._found_for, self._departures_for = None, self._key(plan), None
            self._chosen = None
            self.table.show_rows((), ())
            self.sentence.setText(f"{str(extra)[:1].upper()}{str(extra)[1:]}.")
            self._show_off(None)
            return
        if not isinstance(extra, tuple):
            return
        self._found, self._found_for, off, self._departures_for = extra
        self._show_table()
        self._show_off(off)

    def _show_table(self) -> None:
        found = self._found
        assert found is not None
        rows = [FactRow(name=cells[0], cells=cells[1:]) for cells in waypoint_cells(found)]
        self.table.blockSignals(True)
        self.table.show_rows(waypoint_headings(found), rows)
        self.table.blockSignals(False)
        self.table.fill_width()
        missed = ", ".join(number(density, 2) for density in found.missed)
        parts = [_NONE if not rows else _CHOOSE if self._chosen is None else ""]
        if missed:
            parts.append(f"Not reached: D = {missed}.")
        if found.efficiency is not None:
            parts = [f"Without a ramp: by the assumed efficiency γ = {number(found.efficiency, 2)}, so without times."]
            parts.append("" if self._plan is None else assumed_depth(self._plan))
        self.sentence.setText(" ".join(part for part in parts if part))

    def _show_off(self, off: DeparturesAnswer | None) -> None:
        self._departures = off
        shown = off is not None and bool(off.departures)
        self.off.setVisible(shown)
        if off is None:
            return
        if not shown:
            self.sentence.setText(
                "Nothing follows: this is the end of the ramp, or no error is stated; type how far N or T is off."
            )
            return
        self.sentence.setText(
            f"From D = {number(off.waypoint.phase_space_density, 2)} on, with N off by {percent(off.atoms_error)} "
            f"or T by {percent(off.temperature_error)}:"
        )
        rows = [_off_row(departure) for departure in off.departures]
        heads = ["cloud there", "ends with N", "T", "D", "η", "why it ends"]
        own = off.departures[0].passenger
        if own is not None:
            heads.append("T/Tc of the passenger" if own.gas.bosons else "T/TF of the passenger")
        self.off.show_rows(heads, rows)
        self.off.fill_width()

    def _choose(self) -> None:
        rows = sorted({index.row() for index in self.table.selectionModel().selectedRows()})
        if self._found is None or not rows:
            return
        place = rows[0] if self._found.passenger is None else rows[0] // 2
        if place >= len(self._found.points):
            return
        self._chosen = self._found.points[place].phase_space_density
        self.wanted.emit()

    def _take_densities(self, densities: object) -> None:
        assert isinstance(densities, tuple)
        self._densities, self._chosen = densities, None
        self.wanted.emit()

    def _show_stated_errors(self, plan: Plan) -> None:
        try:
            atoms, kelvin, _label = errors_at(plan, 0.0)
        except ValueError:
            atoms = kelvin = 0.0
        for field, share in ((self.atoms_error, atoms), (self.temperature_error, kelvin)):
            field.setPlaceholderText(percent(share) if share else "")

    def _show_error(self, sentence: str) -> None:
        self.error.setText(sentence)
        self.error.setVisible(bool(sentence))

    # ---------------------------------------------------------------- out

    def csv(self) -> str:
        """The table in SI, with decimal points and full precision."""
        return "" if self._found is None else waypoints_csv(self._found)

    def html(self) -> str:
        """The table for a printer."""
        if self._found is None:
            return ""
        head = "".join(f"<th align='left'>{text}</th>" for text in waypoint_headings(self._found))
        rows = "".join(
            "<tr>" + "".join(f"<td>{cell}</td>" for cell in cells) + "</tr>" for cells in waypoint_cells(self._found)
        )
        title = self._plan.title if self._plan is not None else ""
        return f"<h3>{title}: clouds to aim at</h3><table cellpadding='4'><tr>{head}</tr>{rows}</table>"

    def stopped(self) -> None:
        self._chosen = None

    def set_theme(self, theme: Theme) -> None:
        pass

    def take_focus(self) -> None:
        self.densities.setFocus()


def moving_controls(found: WaypointsAnswer) -> tuple[Control, ...]:
    """Controls that are not the same at all waypoints."""
    first = found.points[0].controls if found.points else {}
    return tuple(control for control in first if len({f"{point.controls[control]:.6g}" for point in found.points}) > 1)


def waypoint_headings(found: WaypointsAnswer) -> tuple[str, ...]:
    """What stands over the table."""
    controls = tuple(control.label for control in moving_controls(found))
    after = format_quantity(found.expansion_time, best_unit(found.expansion_time, ("s", "ms", "µs")), digits=3)
    return ("D", "N", "T", "t", *controls, "η", "collisions", f"widths after {after}")


def waypoint_cells(found: WaypointsAnswer) -> list[tuple[str, ...]]:
    """The rows, for reading."""
    rows = []
    moving = moving_controls(found)
    for point in found.points:
        time = "–" if math.isnan(point.time) else duration(point.time)
        controls = tuple(control_text(control, point.controls[control]) for control in moving)
        rate = "–" if math.isnan(point.collision_rate) else f"{number(point.collision_rate)} s⁻¹"
        rows.append(
            (
                number(point.phase_space_density),
                number(point.atoms),
                temperature(point.temperature),
                time,
                *controls,
                number(point.truncation),
                rate,
                _widths(point.widths),
            )
        )
        if found.passenger is not None:
            rows.append(_passenger_cells(found.passenger, point.passenger, len(moving)))
    return rows


def _passenger_cells(passenger: State, then: PassengerThen | None, controls: int) -> tuple[str, ...]:
    """The row under that of a waypoint: the passenger in the same columns, its degeneracy in that of the time."""
    nothing = ("",) * (controls + 2)
    if then is None:
        return (passenger.key, "–", "–", "–", *nothing, "–")
    ratio = "T/Tc" if passenger.statistics is Statistics.BOSE else "T/TF"
    degeneracy = f"{ratio} {number(then.reduced_temperature)}"
    return (
        passenger.key,
        number(then.atoms),
        temperature(then.temperature),
        degeneracy,
        *nothing,
        _widths(then.widths),
    )


def _widths(widths: tuple[float, float, float]) -> str:
    if any(math.isnan(width) for width in widths):
        return "–"
    return " × ".join(f"{1e6 * width:.3g}" for width in widths) + " µm"


def waypoints_csv(found: WaypointsAnswer) -> str:
    """One row a waypoint, in SI."""
    text = io.StringIO()
    writer = csv.writer(text, lineterminator="\n")
    controls = tuple(found.points[0].controls) if found.points else ()
    heads = ["peak phase-space density", "atoms", "temperature [K]", "time [s]"]
    heads += [f"{c.label} [{c.knob.unit}]" if c.knob.unit else c.label for c in controls]
    heads += ["truncation", "elastic collision rate [1/s]"]
    heads += [f"rms width {axis} [m]" for axis in "xyz"]
    if found.passenger is not None:
        heads += ["passenger atoms", "passenger temperature [K]", "passenger reduced temperature"]
        heads += [f"passenger rms width {axis} [m]" for axis in "xyz"]
    writer.writerow(heads)
    for point in found.points:
        values: Sequence[float] = (
            point.phase_space_density,
            point.atoms,
            point.temperature,
            point.time,
            *(point.controls[control] for control in controls),
            point.truncation,
            point.collision_rate,
            *point.widths,
            *_passenger_values(found, point.passenger),
        )
        writer.writerow("" if math.isnan(value) else repr(float(value)) for value in values)
    return text.getvalue()


def _passenger_values(found: WaypointsAnswer, then: PassengerThen | None) -> tuple[float, ...]:
    if found.passenger is None:
        return ()
    if then is None:
        return (math.nan,) * 6
    return (then.atoms, then.temperature, then.reduced_temperature, *then.widths)


def _off_row(departure: Departure) -> FactRow:
    run = departure.run
    final = run.final
    cells = (
        number(final["atoms"]),
        temperature(final["temperature"]) if math.isfinite(final["temperature"]) else "–",
        number(final["peak_phase_space_density"]),
        number(final["truncation"]),
        run.reason.label,
        *(() if departure.passenger is None else (number(departure.passenger.final["reduced_temperature"]),)),
    )
    return FactRow(name=_departure_name(departure), cells=cells)


def _departure_name(departure: Departure) -> str:
    for letter, factor in (("N", departure.atoms_factor), ("T", departure.temperature_factor)):
        if factor != 1.0:
            word = "more" if factor > 1.0 else "less"
            return f"{letter} {percent(abs(factor - 1.0))} {word}"
    return "as planned"


def _read_densities(text: str) -> tuple[float, ...]:
    if not text.strip():
        return ()
    return tuple(sorted(read_quantity(part.strip(), PHASE_SPACE_DENSITY).value for part in text.split(",")))


def _write_densities(densities: tuple[float, ...]) -> str:
    return ", ".join(f"{density:g}" for density in densities)
