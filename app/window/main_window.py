"""The window. It only assembles: the parts build themselves, and `_connect_signals` is the map of the program."""

from __future__ import annotations

from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QSize, Signal
from PySide6.QtGui import (
    QAction,
    QCloseEvent,
    QColor,
    QDragEnterEvent,
    QDropEvent,
    QGuiApplication,
    QPaintEvent,
    QPalette,
)
from PySide6.QtWidgets import QMainWindow, QMenu, QTextEdit, QVBoxLayout, QWidget

from app.window.settings import Settings, ThemeChoice, rectangle_on_screens

if TYPE_CHECKING:
    from app.answers.trap_solving import Wish
    from app.engine import CloudAnswer
    from app.plan import Plan
    from app.widgets.banner import Banner, Offer
    from app.widgets.page import Page
    from app.window.answers import Answers
    from app.window.desk import Desk
    from app.window.files import Files
    from app.window.looks import Looks
    from app.window.recovery import Recovery
    from app.window.stage_traps import StageTraps
    from app.window.undo import Document
    from app.window.why import Why

FIRST_SIZE = QSize(1400, 900)


class MainWindow(QMainWindow):
    """Empty and quick to show at first; `furnish` then loads everything else and puts it in.

    first_painted() is sent once, when the empty window is on the screen.
    """

    first_painted = Signal()

    document: Document
    answers: Answers
    desk: Desk
    files: Files
    looks: Looks
    recovery: Recovery
    banner: Banner
    why: Why
    stage_traps: StageTraps
    actions_by_id: dict[str, QAction]

    def __init__(self, settings: Settings, *, size: QSize | None = None) -> None:
        super().__init__()
        self.settings = settings
        self.furnished = False
        self._painted = False
        self.setWindowTitle("Coldward")
        self.setAcceptDrops(True)
        self.setMinimumSize(640, 480)
        backdrop = QColor(settings.text("view/backdrop"))
        if backdrop.isValid():
            self.setPalette(QPalette(backdrop))
        self._restore_geometry(size)

    def _restore_geometry(self, size: QSize | None) -> None:
        screens = [screen.availableGeometry() for screen in QGuiApplication.screens()]
        if size is not None:
            self.resize(size)
            return
        if not self.restoreGeometry(self.settings.blob("window/geometry")):
            self.resize(FIRST_SIZE)
        self.setGeometry(rectangle_on_screens(self.geometry(), screens))

    def paintEvent(self, event: QPaintEvent) -> None:
        super().paintEvent(event)
        if not self._painted:
            self._painted = True
            self.first_painted.emit()

    # ---------------------------------------------------------------- assembly

    def furnish(self, plan: Plan, *, theme: ThemeChoice | None = None) -> None:
        """Load numbers, plots and forms, build all parts and show a plan."""
        from app.widgets.banner import Banner
        from app.window.actions import install_actions
        from app.window.answers import Answers
        from app.window.desk import Desk
        from app.window.files import Files
        from app.window.looks import Looks
        from app.window.recent_menu import RecentMenu
        from app.window.recovery import Recovery, install_excepthook
        from app.window.stage_traps import StageTraps
        from app.window.undo import Document
        from app.window.why import Why

        self.looks = Looks(self.settings, theme, self)
        self.setPalette(QPalette())
        self.document = Document(plan, self)
        self.answers = Answers(self)
        self.desk = Desk(self.looks.theme)
        self.banner = Banner()
        self.why = Why(self)
        self.stage_traps = StageTraps(self.document, self.answers, self)
        self.files = Files(self.document, self.settings, self, self.tell, self._problems)
        self.recovery = Recovery(self.document, self.settings.state_folder, self)
        self.actions_by_id = install_actions(self)
        self._recent = RecentMenu(self.settings, self.files.open_path, self)
        file_menu = self.actions_by_id["file.save"].associatedObjects()[-1]
        assert isinstance(file_menu, QMenu)
        file_menu.insertMenu(self.actions_by_id["file.save"], self._recent)
        body = QWidget()
        column = QVBoxLayout(body)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(0)
        column.addWidget(self.banner)
        column.addWidget(self.desk, 1)
        self._connect_signals()
        self.desk.restore_state(self.settings)
        self.setCentralWidget(body)
        self._restore_hook = install_excepthook(self._tell_trouble, self.recovery.save_copy)
        self.furnished = True
        self._theme_checked()
        self._plan_changed(plan)
        self.answers.answer_now()
        self._file_changed()
        if self.settings.notice:
            self.tell(self.settings.notice)
        self._offer_recovery()

    def _connect_signals(self) -> None:
        document, answers, desk = self.document, self.answers, self.desk
        # what the user does becomes a plan
        desk.bench.plan_edited.connect(document.edit)
        # the plan goes to the forms and becomes an answer
        document.loading.connect(desk.bench.discard_edits)
        document.plan_changed.connect(self._plan_changed)
        desk.bench.problems_changed.connect(self._judge)
        desk.bench.trap.solving_wanted.connect(self._solve)
        desk.bench.trap.solving_dropped.connect(answers.drop_solving)
        # the answer goes to all that show it
        answers.cloud_ready.connect(self._show_cloud)
        answers.cloud_failed.connect(self._cloud_failed)
        answers.surveying.connect(self._judge)
        answers.trap_known.connect(self._show_trap)
        answers.part_failed.connect(self.tell)
        # a page that comes to the front, or wants to show something else, asks for its part
        desk.page_built.connect(self._connect_page)
        desk.page_changed.connect(self._page_changed)
        # files, history, looks
        document.file_changed.connect(self._file_changed)
        document.clean_changed.connect(lambda clean: self.setWindowModified(not clean))
        document.stack.undoTextChanged.connect(lambda text: self._name_step("edit.undo", "&Undo", text))
        document.stack.redoTextChanged.connect(lambda text: self._name_step("edit.redo", "&Redo", text))
        document.stack.canUndoChanged.connect(self.actions_by_id["edit.undo"].setEnabled)
        document.stack.canRedoChanged.connect(self.actions_by_id["edit.redo"].setEnabled)
        self.looks.theme_changed.connect(desk.set_theme)
        # what is remembered, and what is told
        desk.readouts.unit_chosen.connect(self._choose_unit)
        desk.readouts.why_asked.connect(self._explain)
        for name in ("edit.undo", "edit.redo"):
            self.actions_by_id[name].setEnabled(False)

    def _connect_page(self, page: Page) -> None:
        """The same for a page, once it is built, after it has learnt what the others know already."""
        page.folder = self.settings.last_folder
        page.recall(
            {name: self.settings.texts(f"{page.title.lower()}/{name}") for name in page.memory()}, self.settings.units
        )
        if self.answers.cloud is not None:
            page.show_cloud(self.answers.cloud)
        # what the user does becomes a plan, or another part to be worked out
        page.plan_edited.connect(self._edit_on_page)
        page.part_wanted.connect(self._ask_part)
        page.part_stopped.connect(self.answers.stop_part)
        page.part_allowed.connect(self._allow_part)
        self.document.loading.connect(page.discard_edits)
        page.trap_asked.connect(self.stage_traps.ask)
        # what is remembered, and what is told
        page.memory_changed.connect(self._keep_memory)
        page.unit_chosen.connect(self._choose_unit)
        page.told.connect(self.tell)
        page.folder_used.connect(self._use_folder)

    # ---------------------------------------------------------------- plan and answer

    def _problems(self) -> tuple[str, ...]:
        """What cannot be read, as sentences."""
        return (*self.desk.problems, *self.stage_traps.problems)

    def _plan_changed(self, plan: Plan) -> None:
        self.desk.bench.set_plan(plan)
        self.answers.set_plan(plan)

    def _edit_on_page(self, plan: Plan, what: str, merge_key: str) -> None:
        """Make the change that a page made to the plan that it shows; the present plan may be a newer one."""
        from app.plan import with_same_change

        shown = self._plan_of(self.desk.page_in_front)
        if shown is None:
            return
        try:
            changed = with_same_change(self.document.plan, shown, plan)
        except ValueError as error:
            self.tell(f"{error}.")
        else:
            self.document.edit(changed, what, merge_key)

    def _show_cloud(self, answer: CloudAnswer) -> None:
        from app.caveat_words import caveat_lines
        from app.words import deciding_figures, verdict

        desk = self.desk
        desk.bench.species.show_length(answer.scattering)
        self._show_trap(answer.plan)
        desk.verdict.show_answer(verdict(answer), deciding_figures(answer))
        if desk.readouts_in_front:
            desk.readouts.show_answer(answer, self.settings.units)
            desk.caveats.show_lines(caveat_lines(answer))
        self.why.show_answer(answer, self.settings.units)
        for page in desk.built_pages:
            page.show_cloud(answer)
        self._ask_part()
        self._judge()

    def _cloud_failed(self, _sentence: str) -> None:
        self._show_trap(self.document.plan)
        self._judge()
        self._ask_part()

    def _show_trap(self, plan: Plan) -> None:
        """What beams and coils come to, if that is known: the cloud's answer has asked for it."""
        from app.engine import trap_answer

        answer = None if plan.trap.harmonic else trap_answer.kept(plan)
        if answer is not None:
            self.desk.bench.trap.show_trap(answer)

    def _solve(self, wish: Wish) -> None:
        """A wish of the Trap form goes to the worker, and what meets it comes back to the form."""
        from app.answers.trap_solving import solve_trap

        card = self.desk.bench.trap.solving
        if card is not None:
            self.answers.solve(partial(solve_trap, self.document.plan, wish), card.show_solved, card.show_no_solution)

    def _judge(self) -> None:
        """A field that cannot be read, a survey that takes time, or a plan without an answer, marks everything as not
        current; once all is well, the answer is again."""
        survey = "the trap is being surveyed" if self.answers.waiting else ""
        problems = [problem for problem in (*self.desk.bench.problems, survey, self.answers.failure) if problem]
        if problems:
            self._mark_stale(problems[0])
        elif self.desk.verdict.stale and self.answers.cloud is not None and self.answers.current:
            self._show_cloud(self.answers.cloud)

    def _mark_stale(self, reason: str) -> None:
        self.desk.verdict.mark_stale(reason)
        self.desk.readouts.mark_stale()
        self.why.mark_stale()
        without_cloud = bool(self.answers.failure) and not self.desk.bench.problems
        for page in self.desk.built_pages:
            if page.needs_cloud or not without_cloud:  # the others show the present plan
                page.mark_stale("last good answer")

    def _page_changed(self) -> None:
        page = self.desk.page_in_front
        if page is not None:
            self.actions_by_id[f"view.{page.title.lower()}"].setChecked(True)
        if self.answers.cloud is not None:
            self._show_cloud(self.answers.cloud)
        else:
            self._ask_part()

    def _ask_part(self) -> None:
        page = self.desk.page_in_front
        plan = self._plan_of(page)
        if page is None or plan is None:
            return
        job = page.part(plan)
        if job is not None:
            self.answers.ask_part(job, page)

    def _plan_of(self, page: Page | None) -> Plan | None:
        """The plan that a page shows: the present one where it needs no cloud and that has none, else the plan of the
        last good answer; None before there is any."""
        if page is not None and not page.needs_cloud and self.answers.failure:
            return self.document.plan
        return None if self.answers.cloud is None else self.answers.cloud.plan

    def _allow_part(self) -> None:
        self.answers.allow_part()
        self._ask_part()

    def _choose_unit(self, name: str, unit: str) -> None:
        self.settings.units = {**self.settings.units, name: unit}
        if self.answers.cloud is not None:
            self.desk.readouts.show_answer(self.answers.cloud, self.settings.units)
            self.why.show_answer(self.answers.cloud, self.settings.units)

    def _keep_memory(self) -> None:
        for page in self.desk.built_pages:
            for name, texts in page.memory().items():
                self.settings.put(f"{page.title.lower()}/{name}", texts)

    def _explain(self, name: str) -> None:
        if self.answers.cloud is not None:
            self.why.ask(name, self.answers.cloud, self.settings.units)
        if self.desk.verdict.stale:
            self.why.mark_stale()

    # ---------------------------------------------------------------- files and history

    def _file_changed(self) -> None:
        self.setWindowTitle(f"{self.files.name}[*] – Coldward")
        self.setWindowModified(not self.document.clean)
        self.setWindowFilePath(str(self.document.path or ""))
        if self.document.path is not None:
            self._use_folder(self.document.path.parent)

    def _use_folder(self, folder: Path) -> None:
        self.settings.last_folder = folder
        for page in self.desk.built_pages:
            page.folder = folder

    def _name_step(self, action: str, verb: str, step: str) -> None:
        self.actions_by_id[action].setText(f"{verb} {step}".strip())

    def dragEnterEvent(self, event: QDragEnterEvent) -> None:
        if self.furnished and self.files.droppable(event.mimeData()) is not None:
            event.acceptProposedAction()

    def dropEvent(self, event: QDropEvent) -> None:
        path = self.files.droppable(event.mimeData())
        if path is not None:
            event.acceptProposedAction()
            self.files.drop(path)

    def closeEvent(self, event: QCloseEvent) -> None:
        if self.furnished and not self.files.may_leave():
            event.ignore()
            return
        self.settings.put("window/geometry", self.saveGeometry())
        if self.furnished:
            self.desk.save_state(self.settings)
        self.end()
        self.settings.flush()
        event.accept()

    def end(self) -> None:
        """Stop all that works in the background; the window is going."""
        if self.furnished:
            self.furnished = False
            self.recovery.close()
            self.stage_traps.close()
            self.answers.close()
            self._restore_hook()

    # ---------------------------------------------------------------- what is told and shown

    def tell(self, sentence: str, *offers: Offer) -> None:
        """Show one sentence across the top of the window."""
        self.banner.tell(sentence, *offers)

    def _tell_trouble(self, sentence: str, details: str) -> None:
        from app.widgets.banner import Offer

        self.tell(sentence, Offer("Copy details", lambda: QGuiApplication.clipboard().setText(details), stays=True))

    def _offer_recovery(self) -> None:
        from app.widgets.banner import Offer

        copies = self.recovery.left_behind()
        if copies:
            copy = copies[0]
            self.tell(
                "Coldward ended without saving a plan last time; a copy of it was kept.",
                Offer("Open the copy", lambda: self.files.recover(copy)),
                Offer("Delete it", lambda: copy.unlink(missing_ok=True)),
            )

    def copy(self) -> None:
        """Copy what the keyboard is on: a text, readouts, or else the plot."""
        from app.widgets.candidate_table import CandidateTable
        from app.widgets.fact_table import FactTable

        focus = self.focusWidget()
        if focus is self.desk.readouts:
            self.desk.readouts.copy()
        elif isinstance(focus, QTextEdit | FactTable | CandidateTable):
            focus.copy()
        elif focus is not None and any(focus is plot.canvas for plot in self.desk.page.plots):
            self.desk.page.copy_picture()

    def _theme_checked(self) -> None:
        self.actions_by_id[f"view.theme_{self.looks.choice.value}"].setChecked(True)
        self.actions_by_id[f"view.{self.desk.page.title.lower()}"].setChecked(True)

    def show_shortcuts(self) -> None:
        from app.window.dialogs import shortcuts_dialog

        shortcuts_dialog(self).exec()

    def show_glossary(self) -> None:
        from app.window.dialogs import glossary_dialog

        glossary_dialog(self).exec()

    def show_about(self) -> None:
        from app.window.dialogs import AboutDialog

        AboutDialog(self).exec()
