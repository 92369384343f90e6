"""Which species and states are compared, ticked in a tree."""

from __future__ import annotations

from collections.abc import Collection

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QDialog,
    QDialogButtonBox,
    QHBoxLayout,
    QLineEdit,
    QPushButton,
    QTreeWidget,
    QTreeWidgetItem,
    QVBoxLayout,
    QWidget,
)

from app.language import translate as _
from physics.particles import Statistics
from physics.species import load_species, species_keys

Which = tuple[str, str]
"""Key of a species, and name of a state."""


class SpeciesDialog(QDialog):
    """`chosen` has the ticked states. OK waits until there is one."""

    def __init__(self, chosen: Collection[Which], parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle(_("Species to compare"))
        self.search = QLineEdit()
        self.search.setPlaceholderText(_("Find"))
        self.search.setAccessibleName(_("Find a species"))
        self.search.setClearButtonEnabled(True)
        self.search.textChanged.connect(self._sift)
        self.tree = QTreeWidget()
        self.tree.setHeaderHidden(True)
        self.tree.setAccessibleName(_("Species and their states"))
        self._states: dict[Which, QTreeWidgetItem] = {}
        self._fill(chosen)
        self.tree.itemChanged.connect(self._judge)
        picks = QHBoxLayout()
        for text, statistics in (
            (_("All"), set(Statistics)),
            (_("Bosons"), {Statistics.BOSE}),
            (_("Fermions"), {Statistics.FERMI}),
            (_("None"), set()),
        ):
            button = QPushButton(text)
            button.setAutoDefault(False)
            button.clicked.connect(lambda _checked=False, wanted=statistics: self.tick(wanted))
            picks.addWidget(button)
        self.buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Ok | QDialogButtonBox.StandardButton.Cancel)
        self.buttons.accepted.connect(self.accept)
        self.buttons.rejected.connect(self.reject)
        column = QVBoxLayout(self)
        column.addWidget(self.search)
        column.addWidget(self.tree, 1)
        column.addLayout(picks)
        column.addWidget(self.buttons)
        digit = self.fontMetrics().horizontalAdvance("0")
        self.resize(52 * digit, 70 * digit)
        self._judge()

    def _fill(self, chosen: Collection[Which]) -> None:
        tristate = Qt.ItemFlag.ItemIsAutoTristate | Qt.ItemFlag.ItemIsUserCheckable
        for key in species_keys():
            species = load_species(key)
            kind = _("boson") if species.isotope.statistics is Statistics.BOSE else _("fermion")
            top = QTreeWidgetItem(self.tree, [f"{key}   {kind}"])
            top.setFlags(top.flags() | tristate)
            for state in species.states:
                item = QTreeWidgetItem(top, [state.name])
                item.setFlags(item.flags() | Qt.ItemFlag.ItemIsUserCheckable)
                ticked = (key, state.name) in chosen
                item.setCheckState(0, Qt.CheckState.Checked if ticked else Qt.CheckState.Unchecked)
                self._states[key, state.name] = item

    @property
    def chosen(self) -> tuple[Which, ...]:
        """The ticked states, in the order of the data."""
        return tuple(which for which, item in self._states.items() if item.checkState(0) is Qt.CheckState.Checked)

    def tick(self, statistics: Collection[Statistics]) -> None:
        """Tick all states of such atoms, and no others."""
        self.tree.blockSignals(True)
        for (key, _name), item in self._states.items():
            wanted = load_species(key).isotope.statistics in statistics
            item.setCheckState(0, Qt.CheckState.Checked if wanted else Qt.CheckState.Unchecked)
        self.tree.blockSignals(False)
        self.tree.viewport().update()
        self._judge()

    def _sift(self, text: str) -> None:
        plain = text.strip().casefold()
        for place in range(self.tree.topLevelItemCount()):
            item = self.tree.topLevelItem(place)
            if item is not None:
                item.setHidden(plain not in item.text(0).casefold())

    def _judge(self) -> None:
        self.buttons.button(QDialogButtonBox.StandardButton.Ok).setEnabled(bool(self.chosen))
