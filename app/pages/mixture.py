"""The Mixture page: the plan's passenger beside its first species, at rest and along the ramp."""

from __future__ import annotations

from dataclasses import dataclass, replace
from functools import partial
from typing import TYPE_CHECKING, Any

from PySide6.QtWidgets import QWidget

from app.engine import CloudAnswer
from app.figures.theme import Theme
from app.language import translate as _
from app.newest import Job, Steps, Watch
from app.plan import Plan
from app.widgets.banner import Offer
from app.widgets.mixture_panel import MixturePanel, MixtureView
from app.widgets.ramp_plots import ColumnPlots
from app.widgets.time_page import TimePage
from app.widgets.usual_ramp import UsualRamp

if TYPE_CHECKING:
    from app.answers.mixture import MixtureAnswer
    from app.answers.mixture_profiles import MixtureProfiles
    from app.answers.ramp import RampAnswer
    from app.answers.sympathetic import SympatheticAnswer
    from app.widgets.plot import Plot

HINT = "Passenger, on the bench, has the numbers of the second species"
RAMP_HINT = "Point at a time, or press ← or →, to read all values"
_NONE = _("This plan has no passenger.")
_WHAT_IT_IS = _("A passenger is another species, or another state of the same atoms, in the same trap.")
_NO_RAMP = _("This plan has no ramp, along which the passenger could follow.")
_START = _("Start from a usual one, which lowers the trap to a tenth in five seconds, or build one on the page Ramp.")
_FAILURES = (ValueError, OSError, ArithmeticError, RuntimeError)


@dataclass(frozen=True, kw_only=True, eq=False)
class Found:
    """What the worker hands out.

    depends_on : all that it was made from
    failure : why there is no mixture, else empty; ramp_failure : why there is no ramp
    lost : whether that is for no fault of the plan, so that it may go well the next time
    """

    plan: Plan
    depends_on: object
    mixture: MixtureAnswer | None = None
    profiles: MixtureProfiles | None = None
    ramp: RampAnswer | None = None
    failure: str = ""
    ramp_failure: str = ""
    lost: bool = False

    @property
    def complete(self) -> bool:
        """Whether nothing is still being worked out."""
        return bool(self.failure or self.ramp_failure) or self.ramp is not None


class MixturePage(TimePage):
    """Attributes: panel, all that is on the page."""

    title = "Mixture"

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(theme, parent)
        self._found: Found | None = None
        self.usual = UsualRamp(self)
        panel = self.panel = MixturePanel(self)
        self.column.addWidget(panel, 1)
        panel.body.addWidget(self.bar)
        panel.view_changed.connect(self._view_changed)
        panel.courses.time_read.connect(self.read_time)
        panel.profile.canvas.pointer_moved.connect(
            lambda place: self.bar.status.say(self.pointer_text(panel.profile, place) or HINT)
        )
        self._all = self.plots

    # ---------------------------------------------------------------- answers

    def part(self, plan: Plan) -> Job | None:
        if plan.passenger is None:
            self._show_none()
            return None
        usual = self.usual.job(plan)
        if usual is not None:
            return usual
        wanted, ramp = self._wanted(plan), self._ramp_wanted(plan)
        found = self._found
        if found is not None and found.depends_on == wanted and (found.complete or not ramp):
            self._show()
            return None
        return Steps(
            what=_("ramp with the passenger") if ramp else _("mixture"),
            depends_on=(self.title, wanted, ramp),
            run=partial(_worked_out, plan, wanted, ramp),
        )

    def _ramp_wanted(self, plan: Plan) -> bool:
        return self.panel.view is MixtureView.RAMP and bool(plan.ramp)

    def _wanted(self, plan: Plan) -> object:
        from app.answers.ramp_jobs import ramp_depends_on

        return plan.cloud, ramp_depends_on(plan)

    def take_part(self, answer: Any) -> None:
        if answer is not None and not self.usual.take(answer):
            self._found = answer
            self._show()

    def show_end(self, *, stopped: bool) -> None:
        super().show_end(stopped=stopped)
        if stopped and self.panel.is_empty:
            self._show_empty(
                _("The simulation of the ramp was stopped."),
                _("Compute in the line below begins it again."),
                views=True,
            )

    # ---------------------------------------------------------------- showing

    def show_cloud(self, cloud: CloudAnswer) -> None:
        super().show_cloud(cloud)
        if self.isVisible() and cloud.plan.passenger is None:
            self._show_none()

    def set_theme(self, theme: Theme) -> None:
        super().set_theme(theme)
        for plot in self._all:
            plot.canvas.set_theme(theme)

    @property
    def answer(self) -> MixtureAnswer | None:
        """The mixture on show."""
        return None if self._found is None else self._found.mixture

    @property
    def sympathetic(self) -> SympatheticAnswer | None:
        """The passenger along the ramp, as it is on show."""
        ramp = None if self._found is None else self._found.ramp
        return None if ramp is None else ramp.passenger

    def _show(self) -> None:
        found = self._found
        if found is None or self.cloud is None or self.cloud.plan.passenger is None:
            return
        if found.mixture is None:
            self._show_empty(_sentence(found.failure), _("Change it in the form Passenger on the bench."))
            return
        if self.panel.view is MixtureView.CLOUDS:
            self._show_clouds(found, found.mixture)
        else:
            self._show_ramp(found, found.mixture)

    def _show_clouds(self, found: Found, answer: MixtureAnswer) -> None:
        from app.figures.mixture_profiles import mixture_picture
        from app.mixture_sentences import cooling_sentence, mixture_facts, mixture_sentence, names_of
        from app.mixture_words import mixture_caveat_lines

        panel, names, profiles = self.panel, names_of(answer), found.profiles
        centres = None if profiles is None else profiles.centres
        panel.tell(mixture_sentence(answer, centres), cooling_sentence(answer), mixture_caveat_lines(answer))
        panel.show_facts(names, mixture_facts(answer))
        panel.show_body()
        panel.profile.canvas.setVisible(profiles is not None)
        self._put_in_front((panel.profile,))
        if profiles is None:
            panel.profile.clear()
        else:
            panel.profile.show(partial(mixture_picture, profiles, names))
        self.bar.status.say(HINT)

    def _show_ramp(self, found: Found, answer: MixtureAnswer) -> None:
        from app.mixture_sentences import cooling_sentence, mixture_sentence
        from app.mixture_words import mixture_caveat_lines, sympathetic_caveat_lines, sympathetic_verdict
        from app.ramp_words import ramp_verdict

        panel = self.panel
        centres = None if found.profiles is None else found.profiles.centres
        texts = mixture_sentence(answer, centres), cooling_sentence(answer), mixture_caveat_lines(answer)
        if not found.plan.ramp:
            panel.tell(*texts)
            offers = (Offer(_("Start from a usual ramp"), self.usual.ask),)
            self._show_empty(_NO_RAMP, _START, offers, views=True)
            return
        if found.ramp is None and not found.complete:
            panel.tell(*texts)
            if self.sympathetic is None and not any(plot.ready for plot in panel.courses.plots.values()):
                self._show_empty(_("The ramp is being simulated."), _("The line below says how far it is."), views=True)
            return
        passenger = self.sympathetic
        if found.ramp is None or passenger is None:
            left_out = found.ramp_failure or ("" if found.ramp is None else found.ramp.passenger_left_out)
            panel.tell(*texts)
            again = (Offer(_("Try again"), self._try_again),) if found.lost else ()
            self._show_empty(_("The passenger is not followed along the ramp."), _sentence(left_out), again, views=True)
            return
        first = ramp_verdict(found.ramp, passenger=False)
        panel.tell(sympathetic_verdict(passenger), first, sympathetic_caveat_lines(passenger))
        panel.show_body()
        self._put_in_front(tuple(panel.courses.plots.values()))
        self._show_courses(passenger, answer)

    def _show_courses(self, passenger: SympatheticAnswer, answer: MixtureAnswer) -> None:
        from app.figures.mixture_courses import course_picture, lines_of
        from app.figures.ramp_columns import round_end
        from app.mixture_sentences import names_of

        assert self._found is not None
        bounds, time = [], 0.0
        for stage in self._found.plan.ramp:
            time += stage.duration.value
            bounds.append(time)
        end = round_end(time)
        for column, plot in self.panel.courses.plots.items():
            lines = lines_of(passenger, column, names_of(answer))
            plot.show(partial(course_picture, column, lines, end, tuple(bounds), self.reading))
        self._say_time()

    def _show_none(self) -> None:
        """There is no passenger."""
        self._found = None
        for plot in self._all:
            plot.clear()
        self.panel.tell("", "")
        self._show_empty(_NONE, _WHAT_IT_IS, (Offer(_("Add a passenger"), self.add_passenger),))

    def _show_empty(self, why: str, remedy: str, offers: tuple[Offer, ...] = (), *, views: bool = False) -> None:
        for plot in self.panel.courses.plots.values() if views else self._all:
            plot.clear()
        if not views:
            self.panel.tell("", "")
        self._put_in_front(())
        self.panel.show_empty(why, remedy, offers, views=views)
        self.bar.status.say("")

    def _put_in_front(self, plots: tuple[Plot, ...]) -> None:
        """These plots are the page: they are exported, and commands work on them."""
        self.bar.show_tools(bool(plots))
        self._plots[:] = plots or tuple(self.panel.courses.plots.values())[:1]
        for plot in plots:
            plot.canvas.set_stale(False)
        if self._active is not None and self._active not in self._plots:
            self._active = None

    def take_focus(self) -> None:
        self.panel.take_focus()

    def _view_changed(self) -> None:
        self._show()
        self.part_wanted.emit()

    # ---------------------------------------------------------------- what the user does

    def add_passenger(self) -> None:
        """Give the plan a passenger to begin with."""
        from app.passenger_edits import with_usual_passenger

        if self.cloud is not None:
            self.plan_edited.emit(with_usual_passenger(self.cloud.plan), "passenger", "")

    def _try_again(self) -> None:
        self._found = None
        self.part_wanted.emit()

    # ---------------------------------------------------------------- reading values

    def show_reading(self) -> None:
        if self.sympathetic is not None and self.answer is not None and not self.panel.is_empty:
            self._show_courses(self.sympathetic, self.answer)

    def _say_time(self) -> None:
        from app.ramp_words import duration

        self.bar.status.say(RAMP_HINT if self.reading is None else f"t = {duration(self.reading)}")

    @property
    def along(self) -> ColumnPlots:
        return self.panel.courses

    @property
    def end(self) -> float | None:
        run = None if self.sympathetic is None else self.sympathetic.run.coolant
        return float(run.time[-1]) if run is not None and len(run.time) else None


def _sentence(clause: str) -> str:
    return f"{clause[:1].upper()}{clause[1:]}." if clause else ""


def _worked_out(plan: Plan, wanted: object, ramp: bool, watch: Watch) -> Found | None:
    """The mixture and, where it is wanted, the ramp with the passenger; None where that was stopped."""
    from app.answers.mixture import mixture_answer
    from app.answers.mixture_profiles import mixture_profiles
    from app.answers.ramp_jobs import ramp_job
    from app.process import ProcessLost

    try:
        mixture = mixture_answer(plan)
        profiles = mixture_profiles(plan)
    except _FAILURES as error:
        return Found(plan=plan, depends_on=wanted, failure=str(error))
    found = Found(plan=plan, depends_on=wanted, mixture=mixture, profiles=profiles)
    if not ramp:
        return found
    if not watch.deliver(found):
        return None
    try:
        answer = ramp_job(plan).run(watch)
    except _FAILURES as error:
        return replace(found, ramp_failure=str(error), lost=isinstance(error, ProcessLost))
    return None if answer is None else replace(found, ramp=answer)
