"""The Ramp page: what becomes of the cloud along its evaporation, and the stages to be edited."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import replace
from typing import TYPE_CHECKING, Any

from PySide6.QtGui import QShowEvent
from PySide6.QtWidgets import QWidget

from app.engine import CloudAnswer
from app.figures.picture import Picture
from app.figures.theme import Theme
from app.newest import Job, Steps, Watch
from app.plan import Plan
from app.widgets.banner import Offer
from app.widgets.pace import Pace
from app.widgets.ramp_exchange import RampExchange
from app.widgets.ramp_panel import RampPanel
from app.widgets.ramp_plots import ColumnPlots, Scene
from app.widgets.ramp_references import KeptRamps, simulated_references
from app.widgets.stage_drag import StageDrag
from app.widgets.time_page import TimePage
from app.widgets.usual_ramp import UsualRamp

if TYPE_CHECKING:
    from app.answers.ramp import RampAnswer
    from app.answers.ramp_found import Found
    from app.figures.ramp_controls import Handle
    from app.ramp_choices import StageChoice
    from app.widgets.ramp_references import Reference

HINT = "Point at a time, or press ← or →, to read all values"
_STEP = "ramp"
_SURVEYED = "The trap is surveyed along the ramp; the first time this takes some seconds."
_DRAFT = "draft"
_DRAFTED = "A draft, from surveys of traps nearby; it is exact once the trap is surveyed along this ramp."
_NO_RAMP = "This plan has no ramp yet."
_START = "Start from a usual one, which lowers the trap to a tenth in five seconds, or let one be designed."


class RampPage(TimePage):
    """Attributes: kept, the ramps kept beside; panel, all that is on the page."""

    title = "Ramp"

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(theme, parent)
        self.kept = KeptRamps()
        self.since: str | None = None  # label of the measured cloud from which the rest is drawn
        self._found: Found | None = None
        self._pace = Pace()
        self.usual = UsualRamp(self)
        self._drag = StageDrag()
        self._scenery: Scene | None = None  # what all plots on show share
        self._shown: Plan | None = None  # whose stages are on show
        panel = self.panel = RampPanel(self)
        self.column.addWidget(panel, 1)
        panel.body.addWidget(self.bar)
        panel.columns.time_read.connect(self.read_time)
        panel.controls.time_read.connect(self.read_time)
        panel.controls.handle_dragged.connect(self._drag_to)
        panel.controls.handle_released.connect(self._end_drag)
        for editor in (panel.stages, panel.design, panel.measured):
            editor.plan_edited.connect(self.plan_edited)
        panel.design.wanted.connect(self.part_allowed)
        panel.waypoints.wanted.connect(self.part_wanted)
        exchange = self.exchange = RampExchange(self)
        exchange.stage_read.connect(self._take_table)
        panel.waypoints.save_asked.connect(lambda: exchange.save_waypoints(panel.waypoints.csv()))
        panel.waypoints.print_asked.connect(lambda: exchange.print_waypoints(panel.waypoints.html()))
        panel.measured.since_chosen.connect(self._follow_from)
        panel.stages.trap_asked.connect(self.trap_asked)
        panel.stages.save_asked.connect(self.ask_save_table)
        panel.stages.read_asked.connect(exchange.ask_read_table)
        panel.stages.problem_changed.connect(self._problem_changed)
        panel.view_changed.connect(self._view_changed)
        panel.arranged.connect(self._offer_tools)
        panel.keep.clicked.connect(self.keep_reference)
        panel.drop.clicked.connect(self.drop_references)
        self.bar.status.say(HINT)
        panel.set_theme(self.theme)

    def showEvent(self, event: QShowEvent) -> None:
        self._pace.arrived()
        super().showEvent(event)

    # ---------------------------------------------------------------- answers

    def part(self, plan: Plan) -> Job | None:
        from app.answers.ramp import kept_ramp

        usual = self.usual.job(plan)
        if usual is not None:
            return usual
        if not plan.ramp and not self.panel.extra_wanted(plan):
            return None
        if self._is_answered(plan) and not self.kept.remembered:
            return None
        kept = kept_ramp(plan, None) is not None
        drafted = self._drag.under_way and not kept and not _is_quick(plan)
        if (drafted or _is_quick(plan)) and not kept and not self._pace.begin():
            return None
        return self._draft_job(plan) if drafted else self._job(plan)

    def _draft_job(self, plan: Plan) -> Steps:
        """While the hand moves a stage of a ramp whose surveys take seconds."""
        from app.answers.ramp_found import drafted

        return Steps(
            what="draft of the ramp",
            depends_on=(self.title, self._key(plan), "draft"),
            run=lambda _watch: drafted(plan),
        )

    def _is_answered(self, plan: Plan) -> bool:
        found = self._found
        return found is not None and found.key == self._key(plan) and self.panel.has_extra(plan)

    def _key(self, plan: Plan) -> object:
        from app.answers.ramp_jobs import ramp_depends_on

        return ramp_depends_on(plan), self.since

    def _job(self, plan: Plan) -> Steps:
        since = self.since
        from app.answers.ramp import kept_ramp
        from app.answers.ramp_found import drafted, simulated_with_rest

        extra, extra_key = self.panel.extra_job(plan)
        key = self._key(plan)
        slow = not _is_quick(plan) and kept_ramp(plan, None) is None
        remembered = tuple(self.kept.remembered)

        def run(watch: Watch) -> Found | None:
            draft = drafted(plan) if slow else None
            if draft is not None and not watch.deliver(draft):
                return None
            found = simulated_with_rest(plan, since, watch)
            if found is None:
                return None
            found = replace(found, key=key)
            if remembered:
                recalled = simulated_references(remembered, watch) if watch.deliver(found) else None
                if recalled is None:
                    return None
                found = replace(found, recalled=recalled)
            if extra is None:
                return found
            if not watch.deliver(found):
                return None
            try:
                more = extra.run(watch)
            except (ValueError, OSError, ArithmeticError, RuntimeError) as error:
                return replace(found, extra=error)
            return None if more is None else replace(found, extra=more)

        what = "ramp" if extra is None else extra.what
        return Steps(what=what, depends_on=(self.title, key, extra_key, len(remembered)), run=run)

    def take_part(self, answer: Any) -> None:
        newer = self._pace.arrived()
        if answer is None or self.usual.take(answer):
            return
        self._found = answer
        if answer.recalled is not None:
            self.kept.take(answer.recalled)
            self.panel.show_references(self.kept.names)
        if answer.extra is not None:
            self.panel.take_extra(answer.plan, answer.extra)
            self._offer_tools()
        if self.cloud is not None and self.cloud.plan == self._shown and self._shown.ramp:
            self._show_found(answer)
        else:
            self._show()
        if newer:
            self.part_wanted.emit()

    def show_end(self, *, stopped: bool) -> None:
        super().show_end(stopped=stopped)
        if stopped:
            self._pace.arrived()
            self.panel.stopped()

    # ---------------------------------------------------------------- showing

    def show_cloud(self, cloud: CloudAnswer) -> None:
        super().show_cloud(cloud)
        if not self.isVisible():
            return
        found = self._found
        if found is not None and found.key != self._key(cloud.plan):
            # The curves follow with their answer, which is under way: one paint of them instead of two.
            self._show_plan()
            if not _is_quick(cloud.plan):
                for plot in self.panel.columns.plots.values():
                    plot.canvas.set_stale(True, "of the ramp before")
        else:
            self._show()

    def set_theme(self, theme: Theme) -> None:
        super().set_theme(theme)
        self.panel.set_theme(theme)

    @property
    def answer(self) -> RampAnswer | None:
        """The simulated ramp on show."""
        return None if self._found is None else self._found.ramp

    @property
    def draft(self) -> bool:
        """Whether it is a draft, until its trap is surveyed."""
        return self._found is not None and self._found.draft

    def _show(self) -> None:
        """The stages of the newest plan at once, and the newest simulation there is."""
        if self._show_plan() and self._found is not None:
            self._show_found(self._found)

    def _show_plan(self) -> bool:
        """The stages of the newest plan; whether there are any, and a ramp can be made of them."""
        from app.answers.ramp_inputs import path_of, ramp_of
        from app.figures.ramp_controls import control_curves
        from app.widgets.ramp_courses import scene_of

        self._shown = None
        if self.cloud is None:
            return False
        plan, panel = self.cloud.plan, self.panel
        if self.since is not None and all(cloud.label != self.since for cloud in plan.measured):
            self.since = panel.measured.since = None
            panel.design.start_from(None)
        panel.set_plan(plan)
        if not plan.ramp:
            self._found = None if self._found is not None and self._found.plan.ramp else self._found
            panel.show_empty(_NO_RAMP, _START, self._offers(plan))
            return False
        panel.show_ramp()
        try:
            ramp = ramp_of(plan)
            curves = control_curves(ramp, path_of(plan).standing)
        except ValueError as error:
            self._tell_trouble(str(error))
            return False
        self._scenery = scene_of(plan, ramp.duration, self.references)
        panel.show_controls(curves, self._scenery, self.reading)
        self._shown = plan
        if self._found is None and not _is_quick(plan):
            panel.tell(_SURVEYED, "")
        return True

    def _show_found(self, found: Found) -> None:
        """What was simulated."""
        from app.ramp_words import ramp_verdict
        from app.widgets.ramp_courses import caveat_lines_of, courses_of, points_of

        panel = self.panel
        if found.failure:
            self._tell_trouble(found.failure)
            return
        if found.ramp is not None and self._scenery is not None:
            panel.table.show_ramp(found.ramp)
            panel.tell(ramp_verdict(found.ramp), _DRAFTED if found.draft else self._detail(found.ramp))
            panel.show_caveats(caveat_lines_of(found.ramp))
            courses, points = courses_of(found, self.references), points_of(found.measured)
            panel.columns.show_courses(courses, self._scenery, points, self.reading)
        panel.measured.show_answers(found.ramp, found.rest)
        if not panel.stages.problem:
            for plot in self._plots:
                plot.canvas.set_stale(found.draft, _DRAFT if found.draft else "")
        self._say_values()

    def _tell_trouble(self, sentence: str) -> None:
        """Why there is no answer; what was there before stays, marked."""
        self.panel.tell(f"{sentence[:1].upper()}{sentence[1:]}.", "")
        super().mark_stale("last good answer")

    def _detail(self, answer: RampAnswer) -> str:
        """When it condenses, what limits, what to change, and how it compares."""
        from app.ramp_advice import advice, difference, onset

        beside = [f"Beside “{ref.name}”: {difference(answer, ref.answer)}." for ref in self.references]
        return " ".join(part for part in (onset(answer), advice(answer).text, *beside) if part)

    def _offers(self, plan: Plan) -> tuple[Offer, ...]:
        return (
            Offer("Start from a usual ramp", self.usual.ask),
            Offer("Design one", lambda: self.panel.choose_view("Design")),
        )

    def _view_changed(self) -> None:
        self._show()
        self.part_wanted.emit()

    @property
    def problems(self) -> tuple[str, ...]:
        """What cannot be read, as sentences."""
        editors = (self.panel.stages, self.panel.design, self.panel.measured)
        return tuple(editor.problem for editor in editors if editor.problem)

    def discard_edits(self) -> None:
        """Drop texts that could not be read: another plan is about to be shown."""
        for editor in (self.panel.stages, self.panel.design, self.panel.measured):
            editor.discard_edits()

    def _problem_changed(self, sentence: str) -> None:
        """A field of the table cannot be read: the plots stay, marked as not following it."""
        for plot in self._plots:
            plot.canvas.set_stale(bool(sentence), "last good answer")

    def pictures(self) -> tuple[Picture, ...]:
        """Those of the view in front."""
        return tuple(plot.picture() for plot in self._plots if plot.ready and plot.canvas.isVisible())

    def _follow_from(self, label: str | None) -> None:
        """Draw the rest of the ramp from a measured cloud too."""
        self.since = label
        self.panel.design.start_from(label)
        self.part_wanted.emit()

    # ---------------------------------------------------------------- tables

    def ask_save_table(self) -> None:
        """Write the ramp on show as a table."""
        if self.cloud is not None and self.cloud.plan.ramp:
            self.exchange.ask_save_table(self.cloud.plan, self.answer)

    def _take_table(self, stage: StageChoice) -> None:
        """Make a table that was read the ramp; one that this trap cannot follow changes nothing and is told of."""
        from app.ramp_edits import checked

        if self.cloud is None:
            return
        try:
            plan = checked(replace(self.cloud.plan, ramp=(stage,)))
        except ValueError as error:
            self.told.emit(f"{error}.")
        else:
            self.plan_edited.emit(plan, _STEP, "")

    # ---------------------------------------------------------------- references

    @property
    def references(self) -> list[Reference]:
        """Ramps that are drawn beside the one on show."""
        return self.kept.references

    def keep_reference(self) -> None:
        """Keep the ramp on show, to be drawn thin beside those that follow."""
        if self.draft:
            self.told.emit("This ramp is still a draft: keep it once its trap is surveyed.")
        elif self._found is not None and self._found.ramp is not None:
            self.kept.keep(self._found.plan, self._found.ramp)
            self._references_changed()

    def drop_references(self) -> None:
        """Draw this ramp alone again."""
        self.kept.drop()
        self._references_changed()

    def _references_changed(self) -> None:
        self.panel.show_references(self.kept.names)
        self.memory_changed.emit()
        self._show()

    def memory(self) -> dict[str, tuple[str, ...]]:
        """The ramps that were kept."""
        return {"references": self.kept.texts()}

    def recall(self, texts: Mapping[str, Sequence[str]], units: Mapping[str, str]) -> None:
        self.kept.recall(tuple(texts.get("references", ())))

    # ---------------------------------------------------------------- reading values

    def show_reading(self) -> None:
        self._show()

    def _offer_tools(self) -> None:
        """Tools where there is a plot for them, values and the hint at them where there is one against time."""
        self.bar.show_tools(any(plot.canvas.isVisibleTo(self) for plot in self.plots))
        self._say_values()

    def _say_values(self) -> None:
        from app.ramp_words import duration

        found = self._found
        if self.reading is None or found is None or found.ramp is None or not self.panel.has_times:
            self.bar.status.say(HINT if self.panel.has_times else "")
            return
        bounds = self._scenery.bounds if self._scenery is not None else ()
        stage = next((k for k, end in enumerate(bounds, start=1) if self.reading <= end), len(bounds))
        parts = [f"t = {duration(self.reading)}", f"stage {stage}"]
        parts += [
            f"{curve.control.label} = {curve.text(curve.at(self.reading))}" for curve in self.panel.controls.curves
        ]
        self.bar.status.say("   ".join(parts))

    @property
    def along(self) -> ColumnPlots:
        return self.panel.columns

    @property
    def end(self) -> float | None:
        run = None if self.cloud is None or self.answer is None else self.answer.run
        return float(run.time[-1]) if run is not None and len(run.time) else None

    # ---------------------------------------------------------------- dragging ends of stages

    def _drag_to(self, handle: Handle, time: float, value: float) -> None:
        if self.cloud is None or self._scenery is None:
            return
        moved = self._drag.moved(self.cloud.plan, handle, time, value, self._scenery.end)
        if moved is not None:
            self.plan_edited.emit(moved, _STEP, self._drag.merge_key)

    def _end_drag(self) -> None:
        self._drag.end()
        self.part_wanted.emit()  # of a drag in a trap of beams only drafts were shown

    # ---------------------------------------------------------------- focus

    def take_focus(self) -> None:
        self.panel.take_focus()


def _is_quick(plan: Plan) -> bool:
    """Whether the ramp is simulated within a moment: without surveys."""
    return plan.trap.harmonic and all(stage.trap is None or stage.trap.harmonic for stage in plan.ramp)
