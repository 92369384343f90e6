"""A whole window, furnished, with settings of its own; a canvas that shows a picture."""

from collections.abc import Callable, Iterator
from pathlib import Path

import pytest
from PySide6.QtCore import QSize
from PySide6.QtWidgets import QApplication, QMessageBox
from pytestqt.qtbot import QtBot
from shiboken6 import delete

from app.figures.picture import Picture
from app.figures.theme import LIGHT, Theme
from app.plan import DEFAULT_PLAN, Plan
from app.window.live_canvas import LiveCanvas
from app.window.main_window import MainWindow
from app.window.settings import Settings, ThemeChoice
from app.window.start import application

MakeWindow = Callable[..., MainWindow]


@pytest.fixture(scope="session")
def qapp() -> QApplication:
    return application()


@pytest.fixture(scope="session", autouse=True)
def all_troubles() -> Iterator[list[str]]:
    """What any window told of errors that nobody caught: its own hook keeps them from the test that made them."""
    told: list[str] = []
    tell = MainWindow._tell_trouble

    def note(window: MainWindow, sentence: str, details: str) -> None:
        told.append(details)
        tell(window, sentence, details)

    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(MainWindow, "_tell_trouble", note)
        yield told


@pytest.fixture
def troubles(all_troubles: list[str]) -> list[str]:
    """For a test in which an error inside the window is meant to happen: the details of those that did."""
    return all_troubles


@pytest.fixture(autouse=True)
def no_trouble(request: pytest.FixtureRequest, all_troubles: list[str]) -> Iterator[None]:
    """Fails a test in which an error inside a window was only told of in its banner."""
    all_troubles.clear()
    yield
    if "troubles" not in request.fixturenames:
        assert not all_troubles, "\n".join(all_troubles)


@pytest.fixture
def make_window(qapp: QApplication, qtbot: QtBot, tmp_path: Path) -> Iterator[MakeWindow]:
    """Builds windows that share one settings folder, and closes them without questions."""
    made: list[MainWindow] = []

    def make(plan: Plan = DEFAULT_PLAN, *, size: tuple[int, int] = (1400, 900)) -> MainWindow:
        window = MainWindow(Settings(tmp_path / "settings"), size=QSize(*size))
        window.show()
        window.furnish(plan, theme=ThemeChoice.LIGHT)
        wait_until_settled(qtbot, window)
        made.append(window)
        return window

    yield make
    for window in made:
        window.document.stack.setClean()
        window.close()
        delete(window)  # at once: windows that pile up make every change of the look slower


@pytest.fixture(scope="module")
def lasting_window(qapp: QApplication, tmp_path_factory: pytest.TempPathFactory) -> Iterator[MainWindow]:
    """One window for all tests of a module, which each load a plan of their own into it."""
    window = MainWindow(Settings(tmp_path_factory.mktemp("settings")), size=QSize(1400, 900))
    window.show()
    window.furnish(DEFAULT_PLAN, theme=ThemeChoice.LIGHT)
    yield window
    window.document.stack.setClean()
    window.close()
    delete(window)


@pytest.fixture
def load_plan(lasting_window: MainWindow, qtbot: QtBot) -> MakeWindow:
    """Loads plans into the one window of the module, in place of a new one for each; from its first page on."""

    def load(plan: Plan = DEFAULT_PLAN) -> MainWindow:
        lasting_window.document.load(plan, None, None)
        lasting_window.desk.show_page(0)
        wait_until_settled(qtbot, lasting_window)
        return lasting_window

    return load


@pytest.fixture
def window(make_window: MakeWindow) -> MainWindow:
    return make_window()


@pytest.fixture
def answer_question(monkeypatch: pytest.MonkeyPatch) -> Callable[[QMessageBox.StandardButton], list[str]]:
    """Answers every question with the given button; the returned list collects what was asked."""

    def prepare(button: QMessageBox.StandardButton) -> list[str]:
        asked: list[str] = []

        def ask(parent: object, title: str, text: str, *rest: object) -> QMessageBox.StandardButton:
            asked.append(text)
            return button

        monkeypatch.setattr(QMessageBox, "warning", ask)
        return asked

    return prepare


def wait_until_settled(qtbot: QtBot, window: MainWindow) -> None:
    """Until plan, answers, the visible part and the paint have all arrived."""
    qtbot.waitUntil(lambda: window.answers.settled)
    QApplication.processEvents()
    QApplication.processEvents()


@pytest.fixture
def settle(qtbot: QtBot) -> Callable[[MainWindow], None]:
    return lambda window: wait_until_settled(qtbot, window)


@pytest.fixture
def show_canvas(qtbot: QtBot) -> Callable[..., LiveCanvas]:
    """Makes a canvas that shows a picture and has been painted."""

    def shown(picture: Picture, *, theme: Theme = LIGHT, size: tuple[int, int] = (640, 480)) -> LiveCanvas:
        canvas = LiveCanvas(theme=theme)
        qtbot.addWidget(canvas)
        canvas.resize(*size)
        canvas.show_picture(lambda: picture)
        canvas.show()
        QApplication.processEvents()
        return canvas

    return shown
