"""Light and dark: followed, overridden, readable."""

import pytest
from PySide6.QtGui import QFont, QPalette
from PySide6.QtWidgets import QApplication

from app.figures.theme import DARK, LIGHT, Theme, contrast
from app.window.looks import palette_of
from app.window.main_window import MainWindow
from app.window.settings import ThemeChoice

ROLE = QPalette.ColorRole


@pytest.mark.parametrize("theme", [LIGHT, DARK], ids=lambda theme: theme.name)
def test_texts_stand_out_from_what_they_lie_on(theme: Theme) -> None:
    palette = palette_of(theme)
    pairs = [
        (ROLE.WindowText, ROLE.Window),
        (ROLE.Text, ROLE.Base),
        (ROLE.PlaceholderText, ROLE.Window),
        (ROLE.PlaceholderText, ROLE.Base),
        (ROLE.HighlightedText, ROLE.Highlight),
        (ROLE.ButtonText, ROLE.Button),
        (ROLE.ToolTipText, ROLE.ToolTipBase),
    ]
    # WCAG 2.2, success criterion 1.4.3: 4.5 to 1 for texts.
    for ink, ground in pairs:
        assert contrast(palette.color(ink).name(), palette.color(ground).name()) >= 4.5, (ink, ground)
    for colour in (theme.error, theme.warning):
        assert contrast(colour, theme.base) >= 4.5


def test_the_view_menu_overrides_the_system_and_is_remembered(make_window) -> None:
    window = make_window()
    window.actions_by_id["view.theme_dark"].trigger()
    assert window.looks.theme is DARK
    assert QApplication.palette().color(ROLE.Window).name() == DARK.window
    assert all(plot.canvas.theme is DARK for page in window.desk.pages for plot in page.plots)
    assert window.settings.theme is ThemeChoice.DARK
    window.actions_by_id["view.theme_light"].trigger()
    assert window.looks.theme is LIGHT
    assert all(plot.canvas.theme is LIGHT for page in window.desk.pages for plot in page.plots)


def test_a_change_of_the_system_is_followed_live_only_where_it_is_wanted(
    window: MainWindow, monkeypatch: pytest.MonkeyPatch
) -> None:
    from app.window import looks

    monkeypatch.setattr(looks, "system_is_dark", lambda: True)
    QApplication.styleHints().colorSchemeChanged.emit(QApplication.styleHints().colorScheme())
    assert window.looks.theme is LIGHT
    window.actions_by_id["view.theme_system"].trigger()
    assert window.looks.theme is DARK
    monkeypatch.setattr(looks, "system_is_dark", lambda: False)
    QApplication.styleHints().colorSchemeChanged.emit(QApplication.styleHints().colorScheme())
    assert window.looks.theme is LIGHT
    window.looks.choose(ThemeChoice.LIGHT)


def test_a_new_plot_has_the_present_look(window: MainWindow) -> None:
    window.actions_by_id["view.theme_dark"].trigger()
    window.desk.show_page(1)
    window.desk.slices.choose(("peak_density",))
    window.answers.answer_now()
    QApplication.processEvents()
    assert all(plot.canvas.theme is DARK for plot in window.desk.slices.plots)
    window.looks.choose(ThemeChoice.LIGHT)


def test_plots_follow_the_size_of_the_system_s_type(make_window) -> None:
    before = QApplication.font()
    larger = QFont(before)
    larger.setPixelSize(18)
    QApplication.setFont(larger)
    try:
        window = make_window()
        theme = window.desk.map.plot.canvas.theme
        assert theme.font_size == pytest.approx(1.5 * LIGHT.font_size)
        assert theme.background == LIGHT.background
        window.close()
    finally:
        QApplication.setFont(before)
