"""The quantity field as a person meets it: typed texts in five locales, steps, errors, units, undo."""

from __future__ import annotations

import pytest
from PySide6.QtCore import QEvent, QLocale, QPoint, QPointF, Qt
from PySide6.QtGui import QAction, QKeyEvent, QKeySequence, QWheelEvent
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QLineEdit, QScrollArea, QVBoxLayout, QWidget
from pytestqt.qtbot import QtBot

from app.units import ATOM_NUMBER, DEPTH, FREQUENCY, SCATTERING_LENGTH, TEMPERATURE, Kind, Quantity, read_quantity
from app.widgets.quantity_field import QuantityField
from physics.constants import boltzmann, planck


def type_text(field: QWidget, text: str) -> None:
    """Press the keys of a text one by one, also those that no test keyboard has."""
    for character in text:
        for kind in (QEvent.Type.KeyPress, QEvent.Type.KeyRelease):
            event = QKeyEvent(kind, 0, Qt.KeyboardModifier.NoModifier, character)
            QApplication.sendEvent(field, event)


def make(qtbot: QtBot, kind: Kind = TEMPERATURE, text: str = "200 nK", **options: object) -> QuantityField:
    options.setdefault("locale", QLocale.c())
    field = QuantityField(kind, kind.name.capitalize(), **options)  # type: ignore[arg-type]
    qtbot.addWidget(field)
    if text:
        field.set_quantity(read_quantity(text, kind))
    field.show()
    return field


# --- the matrix: 5 locales, 20 texts ---------------------------------------------------------------------------------

no = None  # refused, with a sentence
MATRIX: dict[str, tuple[float | None, ...]] = {
    #                    C        en_US    de_DE    fr_FR    de_CH
    "200 nK": (2e-7, 2e-7, 2e-7, 2e-7, 2e-7),
    "200nK": (2e-7, 2e-7, 2e-7, 2e-7, 2e-7),
    "1.5 uK": (1.5e-6, 1.5e-6, 1.5e-6, 1.5e-6, 1.5e-6),
    "1,5 uK": (no, no, 1.5e-6, 1.5e-6, no),
    "1e-6 K": (1e-6, 1e-6, 1e-6, 1e-6, 1e-6),
    "2.5e-7 K": (2.5e-7, 2.5e-7, 2.5e-7, 2.5e-7, 2.5e-7),
    "2,5e-7 K": (no, no, 2.5e-7, 2.5e-7, no),
    "1.500 µK": (1.5e-6, 1.5e-6, no, no, 1.5e-6),
    "1,500 µK": (no, no, 1.5e-6, 1.5e-6, no),
    "0.500 µK": (5e-7, 5e-7, 5e-7, 5e-7, 5e-7),
    "1 000 nK": (no, no, no, no, no),
    "1\u202f000 nK": (no, no, no, no, no),
    "1'000 nK": (no, no, no, no, no),
    "1.000,5 nK": (no, no, no, no, no),
    "1,000.5 nK": (no, no, no, no, no),
    "1.20(5) µK": (1.2e-6, 1.2e-6, 1.2e-6, 1.2e-6, 1.2e-6),
    "1,20(5) µK": (no, no, 1.2e-6, 1.2e-6, no),
    "2.5×10⁻⁶ K": (2.5e-6, 2.5e-6, 2.5e-6, 2.5e-6, 2.5e-6),
    "200": (no, no, no, no, no),
    "-200 nK": (no, no, no, no, no),
}
LOCALES = ("C", "en_US", "de_DE", "fr_FR", "de_CH")


def test_the_matrix_is_five_by_twenty() -> None:
    assert len(MATRIX) == 20
    assert {len(row) for row in MATRIX.values()} == {len(LOCALES)}
    assert {name: QLocale(name).decimalPoint() for name in LOCALES} == {
        "C": ".",
        "en_US": ".",
        "de_DE": ",",
        "fr_FR": ",",
        "de_CH": ".",
    }


@pytest.mark.parametrize("text", MATRIX)
@pytest.mark.parametrize("place", range(5), ids=LOCALES)
def test_typed_numbers_are_read_as_meant_or_refused(qtbot: QtBot, text: str, place: int) -> None:
    field = make(qtbot, text="7 mK", locale=QLocale(LOCALES[place]))
    before = field.quantity
    field.selectAll()
    type_text(field, text)
    assert field.text() == text, "what was typed stays"
    expected = MATRIX[text][place]
    if expected is None:
        assert field.error_text
        # typing went through good beginnings ("1" never is one: the unit comes last), so the last good one is old
        assert field.quantity == before
    else:
        assert field.error_text == ""
        assert field.quantity is not None
        assert field.quantity.value == pytest.approx(expected, rel=1e-14)
        assert read_quantity(field.quantity.text, TEMPERATURE).value == field.quantity.value


def test_plain_keys_type_a_quantity(qtbot: QtBot) -> None:
    field = make(qtbot)
    field.selectAll()
    qtbot.keyClicks(field, "2pi x 4.2 kHz")
    assert '"2π×" belongs to trap frequencies' in field.error_text
    field.selectAll()
    qtbot.keyClicks(field, "4.2 kHz")
    assert field.quantity is not None
    assert field.quantity.value == pytest.approx(4200 * planck / boltzmann, rel=1e-14)


# --- signals ---------------------------------------------------------------------------------------------------------


class Heard:
    """Everything that a field says."""

    def __init__(self, field: QuantityField) -> None:
        self.changed: list[Quantity | None] = []
        self.committed: list[Quantity | None] = []
        self.errors: list[str] = []
        field.changed.connect(self.changed.append)
        field.committed.connect(self.committed.append)
        field.error_changed.connect(self.errors.append)


def test_each_good_keystroke_is_told_and_return_commits(qtbot: QtBot) -> None:
    field = make(qtbot, ATOM_NUMBER, "1e5")
    heard = Heard(field)
    field.selectAll()
    qtbot.keyClicks(field, "25")
    assert [q.text for q in heard.changed if q] == ["2", "25"]
    assert heard.committed == []
    qtbot.keyClick(field, Qt.Key.Key_Return)
    qtbot.keyClick(field, Qt.Key.Key_Return)
    assert heard.committed == [Quantity("25", 25.0)]


def test_setting_a_quantity_is_silent_and_an_echo_leaves_the_text_alone(qtbot: QtBot) -> None:
    field = make(qtbot)
    heard = Heard(field)
    field.set_quantity(read_quantity("1 µK", TEMPERATURE))
    assert field.text() == "1 µK"
    field.changed.connect(field.set_quantity)  # as a window does
    field.setCursorPosition(1)
    type_text(field, "2")
    assert (field.text(), field.cursorPosition()) == ("12 µK", 2)
    type_text(field, ".")
    type_text(field, "0")
    assert field.text() == "12.0 µK"
    assert [q.value for q in heard.changed if q] == [1.2e-5, 1.2e-5, 1.2e-5]
    assert heard.committed == []


def test_a_wrong_text_keeps_the_last_good_quantity_and_stays_to_be_mended(qtbot: QtBot) -> None:
    field = make(qtbot)
    heard = Heard(field)
    field.selectAll()
    qtbot.keyClicks(field, "150")
    assert field.quantity == Quantity("200 nK", 2e-7)
    assert heard.errors == [], "an unfinished text is not called wrong at once"
    qtbot.waitUntil(lambda: heard.errors == [field.error_text])
    assert field.error_text == 'temperature needs a unit: type for instance "200 nK", not "150"'
    assert field.property("invalid") is True
    assert "needs a unit" in field.toolTip()
    assert "needs a unit" in field.accessibleDescription()
    qtbot.keyClick(field, Qt.Key.Key_Return)
    assert (field.text(), heard.changed, heard.committed) == ("150", [], [])
    qtbot.keyClicks(field, " nK")
    assert heard.errors[-1] == ""
    assert field.property("invalid") is False
    assert heard.changed == [Quantity("150 nK", 1.5e-7)]


def test_return_says_at_once_what_is_wrong(qtbot: QtBot) -> None:
    field = make(qtbot)
    heard = Heard(field)
    type_text(field, "x")
    qtbot.keyClick(field, Qt.Key.Key_Return)
    assert heard.errors == [field.error_text] != [""]


def test_escape_goes_back_to_what_was_committed(qtbot: QtBot) -> None:
    field = make(qtbot, ATOM_NUMBER, "1e5")
    heard = Heard(field)
    field.selectAll()
    qtbot.keyClicks(field, "25x")
    qtbot.keyClick(field, Qt.Key.Key_Escape)
    assert (field.text(), field.error_text, field.quantity) == ("1e5", "", Quantity("1e5", 1e5))
    assert heard.changed[-1] == Quantity("1e5", 1e5)


def test_an_optional_field_may_be_empty(qtbot: QtBot) -> None:
    field = make(qtbot, DEPTH, "5 µK", optional=True)
    heard = Heard(field)
    field.selectAll()
    qtbot.keyClick(field, Qt.Key.Key_Backspace)
    qtbot.keyClick(field, Qt.Key.Key_Return)
    assert (field.quantity, field.error_text) == (None, "")
    assert (heard.changed, heard.committed) == ([None], [None])
    field.set_quantity(read_quantity("7 µK", DEPTH))
    assert field.text() == "7 µK"
    field.set_quantity(None)
    assert field.text() == ""
    needed = make(qtbot)
    needed.selectAll()
    qtbot.keyClick(needed, Qt.Key.Key_Backspace)
    assert "temperature is missing" in needed.error_text


def test_an_error_from_elsewhere_is_shown_until_the_next_edit(qtbot: QtBot) -> None:
    field = make(qtbot)
    heard = Heard(field)
    field.show_error("there are no resonances in this state")
    assert heard.errors == ["there are no resonances in this state"]
    field.setCursorPosition(0)
    type_text(field, "1")
    assert heard.errors[-1] == ""


def test_tips_say_what_was_read_in_si(qtbot: QtBot) -> None:
    field = make(qtbot, text="200(10) nK", tip="How warm the atoms are.")
    assert field.toolTip() == "How warm the atoms are.\nTemperature: 2e-07 ± 1e-08 K"
    assert field.accessibleName() == "Temperature"
    assert "2e-07 ± 1e-08 K" in field.accessibleDescription()
    assert field.whatsThis() == "How warm the atoms are."
    field.set_quantity(read_quantity("4.2 kHz", TEMPERATURE))
    assert field.reading_text == "2.015682091e-07 K"


# --- steps -----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("key", "text"),
    [
        (Qt.Key.Key_Up, "202(10) nK"),
        (Qt.Key.Key_Down, "199(10) nK"),
        (Qt.Key.Key_PageUp, "220(10) nK"),
        (Qt.Key.Key_PageDown, "190(10) nK"),
    ],
)
def test_keys_step(qtbot: QtBot, key: Qt.Key, text: str) -> None:
    field = make(qtbot, text="200(10) nK")
    heard = Heard(field)
    qtbot.keyClick(field, key)
    assert field.text() == text
    assert heard.changed == heard.committed == [read_quantity(text, TEMPERATURE)]


def test_steps_wait_until_the_text_is_right(qtbot: QtBot) -> None:
    field = make(qtbot)
    field.selectAll()
    type_text(field, "15")
    qtbot.keyClick(field, Qt.Key.Key_Up)
    assert field.text() == "15"
    empty = make(qtbot, DEPTH, "", optional=True)
    qtbot.keyClick(empty, Qt.Key.Key_Up)
    assert empty.text() == ""


def test_steps_in_a_comma_locale(qtbot: QtBot) -> None:
    field = make(qtbot, text="1.2 µK", locale=QLocale("de_DE"))
    assert field.text() == "1,2 µK"
    qtbot.keyClick(field, Qt.Key.Key_Up)
    assert field.text() == "1,21 µK"
    assert field.quantity == Quantity("1.21 µK", 1.21e-6)
    field.setLocale(QLocale.c())
    assert field.text() == "1.21 µK"


def turn_wheel(widget: QWidget, angle: int, modifiers: Qt.KeyboardModifier = Qt.KeyboardModifier.NoModifier) -> bool:
    """Turn the wheel over a widget; whether it took the event."""
    centre = QPointF(widget.rect().center())
    event = QWheelEvent(
        centre,
        widget.mapToGlobal(centre),
        QPoint(),
        QPoint(0, angle),
        Qt.MouseButton.NoButton,
        modifiers,
        Qt.ScrollPhase.NoScrollPhase,
        False,
    )
    QApplication.sendEvent(widget, event)
    return event.isAccepted()


@pytest.fixture
def page(qtbot: QtBot) -> tuple[QScrollArea, QuantityField, QLineEdit]:
    """A field and a plain line on a page too high for its window."""
    inner = QWidget()
    inner.setMinimumHeight(2000)
    layout = QVBoxLayout(inner)
    field = QuantityField(TEMPERATURE, "Temperature", locale=QLocale.c())
    field.set_quantity(read_quantity("200 nK", TEMPERATURE))
    other = QLineEdit()
    layout.addWidget(other)
    layout.addWidget(field)
    layout.addStretch()
    area = QScrollArea()
    area.setWidget(inner)
    area.setWidgetResizable(True)
    area.resize(300, 200)
    qtbot.addWidget(area)
    area.show()
    area.activateWindow()
    qtbot.waitUntil(area.isActiveWindow)
    return area, field, other


def test_the_wheel_over_an_unfocused_field_scrolls_the_page(page: tuple[QScrollArea, QuantityField, QLineEdit]) -> None:
    area, field, other = page
    other.setFocus()
    assert not turn_wheel(field, -120)
    place = field.mapTo(area.window(), field.rect().center())
    QTest.wheelEvent(area.window().windowHandle(), QPointF(place), QPoint(0, -120))  # as the screen sends it
    QApplication.processEvents()
    assert field.text() == "200 nK"
    assert area.verticalScrollBar().value() > 0


def test_the_wheel_over_the_focused_field_steps(page: tuple[QScrollArea, QuantityField, QLineEdit]) -> None:
    area, field, _ = page
    field.setFocus()
    assert turn_wheel(field, 120)
    assert field.text() == "202 nK"
    assert turn_wheel(field, -60)
    assert field.text() == "202 nK", "half a notch is no step yet"
    assert turn_wheel(field, -60)
    assert field.text() == "200 nK"
    turn_wheel(field, 120, Qt.KeyboardModifier.ShiftModifier)
    assert field.text() == "220 nK"
    assert area.verticalScrollBar().value() == 0


# --- focus and undo --------------------------------------------------------------------------------------------------


def test_focus_by_keyboard_selects_all_and_leaving_commits(
    qtbot: QtBot, page: tuple[QScrollArea, QuantityField, QLineEdit]
) -> None:
    _, field, other = page
    heard = Heard(field)
    other.setFocus()
    qtbot.keyClick(other, Qt.Key.Key_Tab)
    assert field.hasFocus()
    assert field.selectedText() == "200 nK"
    qtbot.keyClicks(field, "150 nK")
    assert heard.committed == []
    other.setFocus()
    assert heard.committed == [Quantity("150 nK", 1.5e-7)]


def test_undo_is_the_fields_own_only_while_there_are_edits(
    qtbot: QtBot, page: tuple[QScrollArea, QuantityField, QLineEdit]
) -> None:
    area, field, _ = page
    undone: list[str] = []
    action = QAction("Undo", area)
    action.setShortcut(QKeySequence.StandardKey.Undo)
    action.triggered.connect(lambda: undone.append("window"))
    area.addAction(action)
    field.setFocus()
    qtbot.keyClick(field, Qt.Key.Key_Z, Qt.KeyboardModifier.ControlModifier)
    assert undone == ["window"], "nothing was edited"
    field.selectAll()
    qtbot.keyClicks(field, "150 n")
    qtbot.keyClick(field, Qt.Key.Key_Z, Qt.KeyboardModifier.ControlModifier)
    assert undone == ["window"]
    assert field.text() != "150 n"
    field.selectAll()
    qtbot.keyClicks(field, "150 nK")
    qtbot.keyClick(field, Qt.Key.Key_Return)
    qtbot.keyClick(field, Qt.Key.Key_Z, Qt.KeyboardModifier.ControlModifier)
    assert undone == ["window", "window"]
    assert field.text() == "150 nK", "the window decides what the field shows next"


def test_the_fields_own_undo_is_read_like_any_edit(qtbot: QtBot) -> None:
    field = make(qtbot, ATOM_NUMBER, "1e5")
    field.selectAll()
    qtbot.keyClicks(field, "25")
    field.undo()
    assert field.text() != "25"
    assert field.error_text or field.quantity == read_quantity(field.text(), ATOM_NUMBER)


# --- units -----------------------------------------------------------------------------------------------------------


def test_another_unit_changes_the_text_and_no_value(qtbot: QtBot) -> None:
    field = make(qtbot, text="1.20(5) µK")
    heard = Heard(field)
    menu = field.unit_menu()
    assert [a.text() for a in menu.actions()] == list(TEMPERATURE.units)
    assert [a.text() for a in menu.actions() if a.isChecked()] == ["µK"]
    for action in menu.actions():
        action.trigger()
        assert field.quantity is not None
        assert (field.quantity.value, field.quantity.sigma) == (1.2e-6, 5e-8)
        assert field.text().endswith(action.text())
        again = read_quantity(field.text(), TEMPERATURE)
        assert again.value == pytest.approx(1.2e-6, rel=1e-9)
        assert again.sigma == pytest.approx(5e-8, rel=1e-3)
    assert len(heard.committed) == len(menu.actions())
    field.show_in("µK")
    assert field.text() == "1.20(5) µK"


def test_units_of_dimensions_that_stand_in(qtbot: QtBot) -> None:
    field = make(qtbot, SCATTERING_LENGTH, "100.4 a0")
    field.show_in("nm")
    assert field.text() == "5.312939194 nm"
    field.show_in("a0")
    assert field.text() == "100.4 a0"


def test_the_context_menu_offers_units_where_there_are_some(qtbot: QtBot) -> None:
    frequency = make(qtbot, FREQUENCY, "120 Hz")
    menu = frequency.context_menu()
    assert [a.text() for a in menu.actions() if a.menu()] == ["Show in"]
    number = make(qtbot, ATOM_NUMBER, "1e5")
    assert not [a for a in number.context_menu().actions() if a.menu()]


def test_the_present_unit_leaves_the_text_as_it_is(qtbot: QtBot) -> None:
    field = make(qtbot, text="1.20 ± 0.05 uK")
    field.show_in("µK")
    assert field.text() == "1.20 ± 0.05 uK"


def test_the_locale_comes_from_the_window(qtbot: QtBot) -> None:
    window = QWidget()
    qtbot.addWidget(window)
    window.setLocale(QLocale("de_DE"))
    field = QuantityField(TEMPERATURE, "Temperature", parent=window)
    field.set_quantity(read_quantity("1.2 µK", TEMPERATURE))
    assert field.text() == "1,2 µK"
