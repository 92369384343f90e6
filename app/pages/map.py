"""The Map page: atom number against temperature, and the cloud on it, to be dragged where it should be."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import Any

from PySide6.QtGui import QShowEvent
from PySide6.QtWidgets import QWidget

from app.answers.csv_text import map_csv
from app.engine import (
    CloudAnswer,
    MapAnswer,
    MapLimits,
    draft_map,
    is_slow,
    map_answer,
    map_with_progress,
    usual_limits,
)
from app.figures.map import Track, map_picture, with_cloud
from app.figures.picture import Picture
from app.figures.theme import Theme
from app.language import translate as _
from app.moving import moved_quantity
from app.newest import Job, Steps, Watch
from app.plan import CloudChoice, Plan
from app.units import ATOM_NUMBER, TEMPERATURE
from app.widgets.pace import Pace
from app.widgets.page import Page
from app.words import number, temperature
from physics.cloud import equilibrium

_TEMPERATURE_UNITS = ("pK", "nK", "µK", "mK", "K")
HINT = "Drag the cloud, or double-click where it should be"
_CLOUD_STEP = "atom number and temperature"


@dataclass(frozen=True, eq=False)
class _Ground:
    """The map without the cloud, ready to be shown under it; `depends_on` is all that it was made from."""

    depends_on: object
    answer: MapAnswer
    picture: Picture


@dataclass(frozen=True, eq=False)
class _Way:
    """The plan's simulated ramp; `depends_on` as above. None: there is none, or it has no answer."""

    depends_on: object
    track: Track | None


class MapPage(Page):
    title = "Map"

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(theme, parent)
        self.plot = self.add_plot("Map of atom number and temperature")
        # Where no plan can put a cloud there is nothing to answer.
        self.plot.bounds = (ATOM_NUMBER.low, ATOM_NUMBER.high, TEMPERATURE.low, TEMPERATURE.high)
        self.column.addWidget(self.plot.canvas, 1)
        self.column.addWidget(self.bar)
        self._ground: _Ground | None = None
        self._way: _Way | None = None
        self._pace = Pace()
        self._limits: MapLimits | None = None
        self._gas: object = None  # what the limits were chosen for
        self._drag = 0
        self._written: CloudChoice | None = None  # the cloud as it was before it was moved here
        self._moves: set[CloudChoice] = set()  # where it has been moved to since
        self.bar.status.say(HINT)
        canvas = self.plot.canvas
        canvas.mark_dragged.connect(self._drag_to)
        canvas.mark_released.connect(self._end_drag)
        canvas.double_clicked.connect(self._set_to)
        canvas.pointer_moved.connect(self._read_pointer)
        self.plot.view_changed.connect(self.part_wanted)

    def part(self, plan: Plan) -> Job | None:
        job = self._map_job(plan)
        if not self._wants_way(plan):
            return job

        def both() -> tuple[_Way, Any]:
            way = _way_of(plan)
            return way, job() if callable(job) else None

        def in_steps(watch: Watch) -> Any:
            assert isinstance(job, Steps)
            return job.run(watch) if watch.deliver(_way_of(plan)) else None

        if isinstance(job, Steps):
            return Steps(what=job.what, depends_on=job.depends_on, run=in_steps)
        if not self._pace.begin():
            return job
        return both

    def _wants_way(self, plan: Plan) -> bool:
        """Whether the plan has a ramp that is quick to simulate, or is there already, and is not on show."""
        if not plan.ramp or (self._way is not None and self._way.depends_on == _what_a_way_depends_on(plan)):
            return False
        from app.answers.ramp import kept_ramp

        harmonic = plan.trap.harmonic and all(stage.trap is None or stage.trap.harmonic for stage in plan.ramp)
        return harmonic or kept_ramp(plan) is not None

    def _map_job(self, plan: Plan) -> Job | None:
        limits = self._wanted_limits(plan)
        cloud = self.cloud
        if cloud is None:
            return None

        depends_on = _what_a_map_depends_on(plan, limits)
        ground = self._ground
        if ground is not None and ground.depends_on == depends_on and ground.answer.complete:
            return None

        def shown(answer: MapAnswer) -> _Ground:
            return _Ground(depends_on, answer, map_picture(answer, cloud))

        def in_steps(watch: Watch) -> _Ground | None:
            if not (watch.deliver(shown(draft_map(plan, limits))) and watch.tell(0.0)):
                return None
            answer = map_with_progress(plan, limits, watch.tell)
            return None if answer is None else shown(answer)

        if is_slow(cloud.model):
            what = _("{model} map").format(model=cloud.model.label)
            return Steps(what=what, depends_on=(self.title, depends_on), run=in_steps)
        return lambda: shown(map_answer(plan, limits))

    def take_part(self, answer: Any) -> None:
        newer = False
        if isinstance(answer, tuple):
            self._way, answer = answer
            newer = self._pace.arrived()
        elif isinstance(answer, _Way):
            self._way, answer = answer, None
        if answer is None:
            if self.cloud is not None:
                self.show_cloud(self.cloud)
        else:
            self._take_ground(answer)
        if newer:
            self.part_wanted.emit()

    def _take_ground(self, answer: _Ground) -> None:
        # A map that was under way when its trap was changed back has nothing to be shown under.
        if self.cloud is not None and answer.depends_on == self._wanted(self.cloud.plan):
            self._ground = answer
            self.plot.show(self._picture)

    def showEvent(self, event: QShowEvent) -> None:
        self._pace.arrived()  # what was under way was overtaken by another page
        super().showEvent(event)

    def show_cloud(self, cloud: CloudAnswer) -> None:
        super().show_cloud(cloud)
        # A cloud in another trap waits for the map of that trap, which is under way: one paint instead of two.
        if self._ground is not None and self._ground.depends_on == self._wanted(cloud.plan):
            self.plot.show(self._picture)

    def _wanted(self, plan: Plan) -> object:
        return _what_a_map_depends_on(plan, self._wanted_limits(plan))

    def _picture(self) -> Picture:
        assert self._ground is not None
        assert self.cloud is not None
        way = self._way
        track = None if way is None or not self.cloud.plan.ramp else way.track
        return with_cloud(self._ground.picture, self.cloud, track)

    def _wanted_limits(self, plan: Plan) -> MapLimits:
        """What the user asked to see; else the range that was shown, while it still suits the cloud."""
        view = self.plot.view
        if view is not None:
            return MapLimits(atoms_low=view[0], atoms_high=view[1], temperature_low=view[2], temperature_high=view[3])
        gas = (plan.species, plan.trap)
        limits = self._limits
        if limits is None or gas != self._gas or not limits.holds(plan.cloud.atoms.value, plan.cloud.temperature.value):
            limits = usual_limits(plan)
        self._limits, self._gas = limits, gas
        return limits

    # ---------------------------------------------------------------- moving the cloud

    def _drag_to(self, _mark: int, atoms: float, temperature_value: float) -> None:
        self._move(atoms, temperature_value, f"map drag {self._drag}")

    def _end_drag(self, _mark: int, atoms: float, temperature_value: float) -> None:
        self._drag_to(_mark, atoms, temperature_value)
        self._drag += 1

    def _set_to(self, atoms: float, temperature_value: float) -> None:
        self._move(atoms, temperature_value, "")

    def _move(self, atoms: float, temperature_value: float, merge_key: str) -> None:
        if self.cloud is None:
            return
        plan = self.cloud.plan
        # Each move starts from what the user wrote, not from the move before: rounded errors would drift.
        if self._written is None or plan.cloud not in self._moves:
            self._written, self._moves = plan.cloud, {plan.cloud}
        written = self._written
        moved = replace(
            plan.cloud,
            atoms=moved_quantity(written.atoms, atoms, ATOM_NUMBER, ("",)),
            temperature=moved_quantity(written.temperature, temperature_value, TEMPERATURE, _TEMPERATURE_UNITS),
        )
        self._moves.add(moved)
        self.plan_edited.emit(replace(plan, cloud=moved), _CLOUD_STEP, merge_key)

    def _read_pointer(self, place: tuple[float, float] | None) -> None:
        if place is None or self.cloud is None:
            self.bar.status.say(HINT)
            return
        atoms, kelvin = place
        central = self.cloud
        there = equilibrium(replace(central.cloud, atoms=atoms, temperature=kelvin), central.model)
        ratio = "T/Tc" if central.bosons else "T/TF"
        self.bar.status.say(
            f"N = {number(atoms)}   T = {temperature(kelvin)}   "
            f"D = {number(float(there.peak_phase_space_density))}   "
            f"{ratio} = {number(float(there.reduced_temperature))}"
        )

    # ---------------------------------------------------------------- numbers

    def csv(self) -> str:
        return "" if self._ground is None else map_csv(self._ground.answer)


def _what_a_way_depends_on(plan: Plan) -> object:
    return plan.species, plan.trap, plan.cloud, plan.losses, plan.target, plan.ramp, plan.measured


def _way_of(plan: Plan) -> _Way:
    """On the worker: the simulated ramp."""
    from app.answers.ramp import ramp_answer
    from app.answers.ramp_inputs import measured_clouds

    try:
        answer = ramp_answer(plan)
        measured = tuple((cloud.atoms, cloud.temperature) for cloud in measured_clouds(plan))
    except (ValueError, OSError, ArithmeticError):  # told on the page of the ramp
        return _Way(_what_a_way_depends_on(plan), None)
    return _Way(_what_a_way_depends_on(plan), Track(run=answer.run, measured=measured))


def _what_a_map_depends_on(plan: Plan, limits: MapLimits) -> object:
    return plan.species, plan.trap, plan.cloud.model, plan.target, limits
