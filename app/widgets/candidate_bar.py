"""What the user chooses about a comparison: its basis, its species, the columns, and what is shown under the table."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QButtonGroup, QHBoxLayout, QLabel, QMenu, QRadioButton, QToolButton, QWidget

from app.candidate_choices import Basis, Start
from app.candidate_columns import COLUMNS, USUAL_COLUMNS, columns_in
from app.candidate_order import SCORE
from app.language import translate as _
from app.quantity_row import Group
from app.sureness import MARKED
from app.widgets.flow import Flow
from app.widgets.form import Choice

BASES = (
    (Basis.SAME_FREQUENCIES, Start.ATOMS_AND_TEMPERATURE),
    (Basis.SAME_LIGHT, Start.ATOMS_AND_TEMPERATURE),
    (Basis.SAME_START, Start.ATOMS_AND_TEMPERATURE),
    (Basis.SAME_START, Start.PHASE_SPACE_DENSITY),
)
_BASIS_TEXTS = (
    (_("same frequencies"), _("Each in a harmonic trap of the plan's frequencies and depth")),
    (
        _("same light and coils"),
        _("Each in the plan's beams and coils: frequencies, depth, sag and scattering are its own"),
    ),
    (_("same start: N and T"), _("Each in the trap of the plan, with the plan's atoms and temperature")),
    (
        _("same start: phase-space density"),
        _("Each in the trap of the plan, at the temperature that makes it as degenerate as the plan's cloud"),
    ),
)


class ChoiceBar(QWidget):
    """Signals: basis_chosen(place in BASES); species_asked(); fields_asked(); rules_shown(bool); evaporation_asked();
    columns_chosen(names)."""

    basis_chosen = Signal(int)
    species_asked = Signal()
    fields_asked = Signal()
    rules_shown = Signal(bool)
    evaporation_asked = Signal()
    columns_chosen = Signal(object)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.names: tuple[str, ...] = USUAL_COLUMNS
        self.basis = Choice()
        self.basis.setAccessibleName(_("In what candidates are compared"))
        self.basis.setToolTip(_("In what candidates are compared"))
        self.basis.setMinimumContentsLength(22)
        for place, (text, tip) in enumerate(_BASIS_TEXTS):
            self.basis.addItem(text)
            self.basis.setItemData(place, tip, Qt.ItemDataRole.ToolTipRole)
        self.basis.activated.connect(self.basis_chosen)
        self.species = _button(_("Species…"), _("Choose which species and states are compared"))
        self.species.clicked.connect(self.species_asked)
        self.fields = _button(_("Fields…"), _("Judge each species at its best magnetic field within a range"))
        self.fields.clicked.connect(self.fields_asked)
        self.columns = _button(_("Columns") + " ▾", _("Choose the columns of the table"))
        self.columns.setPopupMode(QToolButton.ToolButtonPopupMode.InstantPopup)
        self.menu = QMenu(self.columns)
        self.menu.setToolTipsVisible(True)
        self.menu.aboutToShow.connect(self._fill_menu)
        self.columns.setMenu(self.menu)
        self.rules = _button("", _("Your own filters, and weights for a score"))
        self.rules.setCheckable(True)
        self.rules.toggled.connect(self.rules_shown)
        self.evaporate = _button(
            _("Evaporate"), _("Find the best evaporation of every candidate on show, on all cores of this computer")
        )
        self.evaporate.clicked.connect(self.evaporation_asked)
        row = Flow(self, spacing=6)
        for widget in (self.basis, self.species, self.fields, self.columns, self.rules, self.evaporate):
            row.addWidget(widget)
        self.count_rules(0, 0)

    def show_basis(self, basis: Basis, start: Start) -> None:
        """Show in what is compared; nothing is sent."""
        start = start if basis is Basis.SAME_START else Start.ATOMS_AND_TEMPERATURE
        self.basis.setCurrentIndex(BASES.index((basis, start)))

    def count_rules(self, filters: int, weights: int) -> None:
        """How many there are, on the button that shows them."""
        parts = (_("Filters"), str(filters or ""), _("· weights"), str(weights or ""))
        self.rules.setText(" ".join(part for part in parts if part))

    def _fill_menu(self) -> None:
        self.menu.clear()
        usual = self.menu.addAction(_("The usual columns"))
        usual.triggered.connect(lambda: self.columns_chosen.emit(USUAL_COLUMNS))
        for group in Group:
            # Below each other they would be higher than the screen.
            part = self.menu.addMenu(group.value)
            part.setToolTipsVisible(True)
            for column in columns_in(group):
                action = part.addAction(column.row.label)
                action.setCheckable(True)
                action.setChecked(column.name in self.names)
                action.setToolTip(column.row.formula)
                action.triggered.connect(self._toggler(column.name))

    def _toggler(self, name: str) -> Callable[[bool], None]:
        return lambda on: self.toggle(name, on)

    def toggle(self, name: str, shown: bool) -> None:
        """Show a column, or hide it; the last one stays."""
        others = tuple(other for other in self.names if other != name)
        names = (*others, name) if shown else others
        if names:
            self.columns_chosen.emit(names)


class ViewBar(QWidget):
    """What is shown under the table, and what orders the rows. Signals: view_chosen(number): 0 thresholds, 1 ranking,
    2 explanation; order_chosen(name)."""

    view_chosen = Signal(int)
    order_chosen = Signal(str)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.group = QButtonGroup(self)
        row = QHBoxLayout(self)
        row.setContentsMargins(14, 4, 14, 0)
        row.setSpacing(12)
        for place, (text, tip) in enumerate(
            (
                (_("Thresholds"), _("Where each candidate becomes degenerate, over atom number and temperature")),
                (_("Ranking"), _("The candidates in the order of one column")),
                (_("Explanation"), _("All that is to be said of the cell that the keyboard is on")),
            )
        ):
            button = QRadioButton(text)
            button.setToolTip(tip)
            button.setChecked(place == 0)
            self.group.addButton(button, place)
            row.addWidget(button)
        self.order = Choice()
        self.order.setAccessibleName(_("Order by"))
        self.order.setToolTip(_("The column that orders table and ranking"))
        self.order.setMinimumContentsLength(14)
        self.order.activated.connect(lambda _place: self.order_chosen.emit(str(self.order.currentData())))
        self.marks = QLabel("   ".join(f"{sure.mark} {sure.value}" for sure in MARKED))
        self.marks.setToolTip("\n".join(f"{sure.mark} {sure.value}: {sure.meaning}" for sure in MARKED))
        self.marks.setObjectName("plotStatus")
        self.marks.setMinimumWidth(40)
        row.addWidget(QLabel(_("by")))
        row.addWidget(self.order)
        row.addStretch(1)
        row.addWidget(self.marks)
        self.group.idToggled.connect(lambda place, on: self.view_chosen.emit(place) if on else None)

    @property
    def view(self) -> int:
        return max(self.group.checkedId(), 0)

    def show_order(self, names: Sequence[str], scored: bool, name: str) -> None:
        """Offer these columns, and the score; `name` is the one in use, empty for the order of the data."""
        wanted = [("", _("mass number")), *([(SCORE, _("score"))] if scored else [])]
        wanted += [(other, COLUMNS[other].row.label) for other in names]
        if name not in dict(wanted):
            wanted.append((name, COLUMNS[name].row.label))
        present = [(self.order.itemData(place), self.order.itemText(place)) for place in range(self.order.count())]
        if present != wanted:
            self.order.clear()
            for data, text in wanted:
                self.order.addItem(text, data)
        self.order.setCurrentIndex([data for data, _text in wanted].index(name))


def _button(text: str, tip: str) -> QToolButton:
    button = QToolButton()
    button.setText(text)
    button.setToolTip(tip)
    button.setAccessibleName(tip)
    return button
