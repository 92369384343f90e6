"""The small windows of the Help menu: about, keyboard shortcuts, glossary."""

from __future__ import annotations

from html import escape

from PySide6.QtCore import QSize, Qt, qVersion
from PySide6.QtGui import QKeySequence
from PySide6.QtWidgets import QDialog, QDialogButtonBox, QLabel, QTextBrowser, QVBoxLayout, QWidget

from app import __version__
from app.quantities import Group, rows_in
from app.trap_words import COILS_CAUTION, LIGHT_CAUTION
from app.window.actions import ACTIONS, MenuName, key_sequences

NOTICE = (
    "Results are planning estimates. The lab's own measurements and licensed practice decide; the program controls no "
    "hardware."
)


class TextDialog(QDialog):
    """A page of text that can be read, selected and scrolled by keyboard, and a Close button."""

    def __init__(self, title: str, html: str, size: QSize, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle(title)
        self.browser = QTextBrowser()
        self.browser.setAccessibleName(title)
        self.browser.setHtml(html)
        self.browser.setTabChangesFocus(True)
        buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Close)
        buttons.rejected.connect(self.reject)
        column = QVBoxLayout(self)
        column.addWidget(self.browser)
        column.addWidget(buttons)
        self.resize(size)


class AboutDialog(QDialog):
    """What this is, which version, under which licences, and what its numbers are for."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle("About Coldward")
        text = QLabel(
            f"<h2>Coldward {__version__}</h2>"
            "<p>Plans the cooling of trapped atoms to a Bose-Einstein condensate or a degenerate Fermi gas.</p>"
            f"<p>{escape(NOTICE)}</p>"
            f"<p>{escape(LIGHT_CAUTION)}</p><p>{escape(COILS_CAUTION)}</p>"
            "<p>Coldward is free software under the BSD-3-Clause licence. Its window is made with Qt for Python "
            "(PySide6), used unmodified under the GNU Lesser General Public License, version 3; Qt's libraries stay "
            f"separate files that can be replaced.</p><p>Qt {escape(qVersion())}</p>"
        )
        text.setTextFormat(Qt.TextFormat.RichText)
        text.setWordWrap(True)
        text.setTextInteractionFlags(
            Qt.TextInteractionFlag.TextSelectableByMouse | Qt.TextInteractionFlag.TextSelectableByKeyboard
        )
        text.setAccessibleName("About Coldward")
        self.text = text
        buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Close)
        buttons.rejected.connect(self.reject)
        column = QVBoxLayout(self)
        column.setContentsMargins(24, 16, 24, 16)
        column.addWidget(text)
        column.addWidget(buttons)
        self.setMinimumWidth(460)


def shortcuts_dialog(parent: QWidget | None = None) -> TextDialog:
    """All actions by menu, with their keys here; then the keys of fields, plots and readouts."""
    parts = []
    for menu in MenuName:
        rows = [
            (spec.text.replace("&", ""), _keys_text(key_sequences(spec)), spec.tip)
            for spec in ACTIONS
            if spec.menu is menu
        ]
        parts.append(_section(menu.plain, rows))
    parts.append(
        _section(
            "In a field",
            [
                ("Step up or down", "Up, Down", "By one in the last digits that count; Page Up and Page Down by ten"),
                ("Take the change", "Return", "What is typed is taken as soon as it can be read"),
            ],
        )
    )
    parts.append(
        _section(
            "On a beam of the trap",
            [
                ("Fold or unfold", "Space", "On its name"),
                ("Rename", "F2", "Anywhere on its card; the ramp follows"),
                ("Duplicate", "Ctrl+D", "A copy behind it, with a name of its own"),
                ("Move", "Alt+Up, Alt+Down", "Its place among the beams"),
            ],
        )
    )
    parts.append(
        _section(
            "On the map",
            [
                (
                    "Move the cloud",
                    "Arrow keys",
                    "Left and right change N, up and down change T; with Shift in large steps",
                ),
                ("Set the cloud", "Double click", "At the pointer; or drag the point"),
            ],
        )
    )
    parts.append(
        _section(
            "On the page Ramp",
            [
                (
                    "Read all values",
                    "Left, Right",
                    "On a plot of the cloud: at the time before or after; Shift for ten",
                ),
                ("Move the end of a stage", "Arrow keys", "On a plot of a control: M chooses the next one"),
            ],
        )
    )
    return TextDialog("Keyboard shortcuts", "".join(parts), QSize(720, 600), parent)


def glossary_dialog(parent: QWidget | None = None) -> TextDialog:
    """Every quantity under its heading, with symbol, formula, source and range."""
    parts = []
    for group in Group:
        entries = "".join(
            f"<p><b>{escape(row.label)}</b>, {escape(row.symbol)}<br>{escape(row.formula)}<br>"
            f"<small>{escape(row.source)}; {escape(row.validity)}</small></p>"
            for row in rows_in(group)
        )
        parts.append(f"<h3>{escape(group.value)}</h3>{entries}")
    return TextDialog("Glossary", "".join(parts), QSize(640, 640), parent)


def _section(title: str, rows: list[tuple[str, str, str]]) -> str:
    body = "".join(
        f'<tr><td width="150">{escape(name)}</td><td width="190"><b>{escape(keys)}</b></td><td>{escape(tip)}</td></tr>'
        for name, keys, tip in rows
    )
    return f'<h3>{escape(title)}</h3><table width="100%" cellpadding="2">{body}</table>'


def _keys_text(keys: list[QKeySequence]) -> str:
    """The usual key and one other; a platform may bind more, some of them keys for media that few keyboards have."""
    usual = [key for key in keys if key[0].key() < Qt.Key.Key_Back]  # type: ignore[index]
    return ", ".join(key.toString(QKeySequence.SequenceFormat.NativeText) for key in usual[:2]) or "–"
