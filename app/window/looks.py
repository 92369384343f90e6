"""Light or dark: one theme for palette, widgets and plots, following the system unless the user chose one."""

from __future__ import annotations

import gc
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import replace
from functools import lru_cache

from PySide6.QtCore import QObject, Qt, Signal
from PySide6.QtGui import QColor, QFontInfo, QPalette
from PySide6.QtWidgets import QApplication

from app.figures.theme import DARK, LIGHT, Theme
from app.window.settings import Settings, ThemeChoice

_Role = QPalette.ColorRole


def palette_of(theme: Theme) -> QPalette:
    """The theme's colours in the places where the toolkit's style looks for them."""
    palette = QPalette(QColor(theme.window))
    plain = {
        _Role.Window: theme.window,
        _Role.WindowText: theme.text,
        _Role.Base: theme.base,
        _Role.AlternateBase: theme.window,
        _Role.Text: theme.text,
        _Role.Button: theme.window,
        _Role.ButtonText: theme.text,
        _Role.BrightText: theme.error,
        _Role.PlaceholderText: theme.muted,
        _Role.ToolTipBase: theme.base,
        _Role.ToolTipText: theme.text,
        _Role.Highlight: theme.accent,
        _Role.HighlightedText: theme.base,
        _Role.Accent: theme.accent,
        _Role.Link: theme.accent,
        _Role.LinkVisited: theme.accent,
        _Role.Mid: theme.border,
    }
    for role, colour in plain.items():
        palette.setColor(role, QColor(colour))
    for role in (_Role.WindowText, _Role.Text, _Role.ButtonText):
        palette.setColor(QPalette.ColorGroup.Disabled, role, QColor(theme.muted))
    return palette


def style_sheet_of(theme: Theme) -> str:
    """What a palette cannot say: the few rules and tints between the parts of the window."""
    return f"""
        #banner {{ background: {theme.base}; border: none; border-bottom: 2px solid {theme.warning}; }}
        #bannerSign {{ color: {theme.warning}; font-weight: bold; }}
        #verdictSentence {{ background: transparent; }}
        #bench, #benchBody, #readouts, #caveats, #detail, #explanation, #factTable,
        #candidateTable {{
            background: {theme.window}; border: none; }}
        #formTitle, #paneTitle {{ color: {theme.muted}; font-weight: 600; }}
        #fieldNote, #plotStatus, #detail {{ color: {theme.muted}; }}
        #fieldError {{ color: {theme.error}; }}
        #fact[stale="true"] {{ color: {theme.muted}; }}
        #cardTitle, #cautionTitle {{ border: none; padding: 2px 4px 2px 0px; }}
        #cardTitle[off="true"] {{ color: {theme.muted}; }}
        #cardMenu {{ border: none; padding: 0px 4px; color: {theme.muted}; }}
        #caution {{ border: none; border-left: 2px solid {theme.warning}; }}
        #cautionTitle {{ color: {theme.muted}; }}
        QLineEdit {{ border: 1px solid {theme.border}; border-radius: 3px; padding: 3px 5px;
                     background: {theme.base}; }}
        QComboBox QLineEdit {{ border: none; padding: 0px; }}
        QLineEdit:focus {{ border-color: {theme.accent}; }}
        QLineEdit[invalid="true"] {{ border-color: {theme.error}; }}
        QToolButton#formTitle {{ border: none; padding: 0px; }}
        QToolButton:checked {{ background: {theme.accent}; color: {theme.base}; border-radius: 3px; }}
        QToolButton::menu-indicator {{ image: none; width: 0px; }}
        QRadioButton::indicator {{ width: 11px; height: 11px; border: 1px solid {theme.muted}; border-radius: 6px;
                                   background: {theme.base}; }}
        QRadioButton::indicator:checked {{ border: 4px solid {theme.accent}; width: 5px; height: 5px; }}
        QTabWidget::pane {{ border: none; }}
        QTabBar::tab {{ padding: 6px 10px 5px 10px; border: none; background: transparent; color: {theme.muted};
                        border-bottom: 2px solid transparent; }}
        QTabBar::tab:selected {{ color: {theme.text}; border-bottom-color: {theme.accent}; }}
        QTabBar::tab:focus {{ text-decoration: underline; }}
        QSplitter::handle {{ background: {theme.border}; }}
        #candidateTable QHeaderView, #candidateTable QTableCornerButton::section {{
            background: {theme.window}; border: none; }}
        #candidateTable QHeaderView::section {{ background: {theme.window}; border: none; padding: 2px 6px; }}
        #candidateTable QHeaderView::section:horizontal {{ color: {theme.muted};
                                                          border-bottom: 1px solid {theme.border}; }}
        #candidateTable::item {{ padding: 0px 6px; }}
        #factTable QHeaderView::section {{ background: {theme.window}; color: {theme.muted}; border: none;
                                          padding: 2px 7px 2px 3px; }}
        #factTable::item {{ padding-right: 7px; }}
        QToolTip {{ color: {theme.text}; background: {theme.base}; border: 1px solid {theme.border}; padding: 3px; }}
    """


@contextmanager
def _no_collection() -> Iterator[None]:
    collecting = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if collecting:
            gc.enable()


def system_is_dark() -> bool:
    """Whether the desktop's own look is dark; light where it does not say."""
    return QApplication.styleHints().colorScheme() is Qt.ColorScheme.Dark


USUAL_TYPE = 12.0  # pixels: the size of the system's type that the plots' own sizes are made for


@lru_cache(maxsize=8)
def sized(theme: Theme, scale: float) -> Theme:
    """The theme with type of another size on plots."""
    if scale == 1.0:
        return theme
    return replace(
        theme,
        small_size=theme.small_size * scale,
        font_size=theme.font_size * scale,
        title_size=theme.title_size * scale,
    )


def type_scale() -> float:
    """How much larger than usual the system's type is, in steps of a twentieth; never below the usual."""
    size = QFontInfo(QApplication.font()).pixelSize()
    return max(1.0, round(20.0 * size / USUAL_TYPE) / 20.0)


class Looks(QObject):
    """Holds the theme in use. theme_changed(Theme) is sent whenever it becomes another one."""

    theme_changed = Signal(object)

    def __init__(self, settings: Settings, override: ThemeChoice | None = None, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._settings = settings
        self._choice = override or settings.theme
        self.theme: Theme = LIGHT
        hints = QApplication.styleHints()
        hints.colorSchemeChanged.connect(self._system_changed)
        self._apply()

    @property
    def choice(self) -> ThemeChoice:
        return self._choice

    def choose(self, choice: ThemeChoice) -> None:
        """Use this look from now on, and in later sessions."""
        self._choice = choice
        self._settings.theme = choice
        self._apply()

    def _system_changed(self) -> None:
        if self._choice is ThemeChoice.SYSTEM:
            self._apply()

    def _apply(self) -> None:
        dark = {
            ThemeChoice.DARK: True,
            ThemeChoice.LIGHT: False,
            ThemeChoice.SYSTEM: system_is_dark(),
        }[self._choice]
        theme = sized(DARK if dark else LIGHT, type_scale())
        application = QApplication.instance()
        if not isinstance(application, QApplication):
            raise RuntimeError("a look needs a running application")
        # Both walk over all widgets and call back into Python; a garbage collection in between could destroy one of
        # them under the toolkit's feet.
        with _no_collection():
            application.setPalette(palette_of(theme))
            application.setStyleSheet(style_sheet_of(theme))
        self._settings.put("view/backdrop", theme.window)
        if theme is not self.theme:
            self.theme = theme
            self.theme_changed.emit(theme)
