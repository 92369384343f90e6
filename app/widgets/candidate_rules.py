"""The user's own filters and weights: which candidates are shown, and what counts how much in the score."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QComboBox, QGridLayout, QHBoxLayout, QLabel, QLineEdit, QToolButton, QWidget

from app.candidate_columns import COLUMNS, columns_in
from app.candidate_order import Bound, Sieve, Trait, Weight, limit_kind, read_bound, read_weight
from app.language import translate as _
from app.quantity_row import Group
from app.widgets.flow import Flow
from app.widgets.form import Choice

_TRAIT_TIPS = {
    Trait.BOSONS: _("Show bosons only"),
    Trait.FERMIONS: _("Show fermions only"),
    Trait.TRAPPED: _("Show what the trap holds"),
    Trait.COLLIDING: _("Show atoms that are known to collide"),
    Trait.SOUND: _("Show candidates that fail nowhere"),
}


class CandidateRules(QWidget):
    """changed() is sent when the user sets another filter or weight.

    Attributes: sieve, weights.
    """

    changed = Signal()

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.sieve, self.weights = Sieve(), ()  # type: tuple[Sieve, tuple[Weight, ...]]
        self.traits: dict[Trait, QToolButton] = {}
        self.limits = _Rules(_("Limit"), ("≥", "≤"), _("10 1/s"), _("Add a limit that a column must keep"))
        self.weighing = _Rules(_("Weight"), (_("more"), _("less")), "1", _("Add a column to the score"))
        self.limits.direction.setToolTip(_("At least, or at most"))
        self.weighing.direction.setToolTip(_("Whether more of it, or less, is better"))
        self.limits.added.connect(self._add_bound)
        self.weighing.added.connect(self._add_weight)
        self.weighing.column.currentIndexChanged.connect(self._suggest_direction)
        self.limits.column.currentIndexChanged.connect(self._suggest_limit)
        boxes = QHBoxLayout()
        boxes.setSpacing(4)
        for trait in Trait:
            box = QToolButton()
            box.setText(trait.label)
            box.setCheckable(True)
            box.setToolTip(_TRAIT_TIPS[trait])
            box.setAccessibleName(_TRAIT_TIPS[trait])
            box.toggled.connect(lambda _on, one=trait: self._toggle(one))
            self.traits[trait] = box
            boxes.addWidget(box)
        boxes.addStretch(1)
        grid = QGridLayout(self)
        grid.setContentsMargins(0, 2, 0, 4)
        grid.setHorizontalSpacing(8)
        grid.setVerticalSpacing(3)
        for line, word in enumerate((_("Show only"), _("Limits"), _("Weights"))):
            label = QLabel(word)
            label.setObjectName("plotStatus")
            grid.addWidget(label, line, 0, Qt.AlignmentFlag.AlignTop)
        grid.addLayout(boxes, 0, 1)
        grid.addWidget(self.limits, 1, 1)
        grid.addWidget(self.weighing, 2, 1)
        grid.setColumnStretch(1, 1)
        self._suggest_direction()
        self._suggest_limit()

    # ---------------------------------------------------------------- set from outside

    def set_rules(self, sieve: Sieve, weights: Sequence[Weight]) -> None:
        """Show these; nothing is sent."""
        self.sieve, self.weights = sieve, tuple(weights)
        for trait, box in self.traits.items():
            box.blockSignals(True)
            box.setChecked(trait in sieve.traits)
            box.blockSignals(False)
        self._show()

    def _show(self) -> None:
        self.limits.show_chips([(bound_text(bound), self._dropper(bound)) for bound in self.sieve.bounds])
        self.weighing.show_chips([(weight_text(weight), self._lifter(weight)) for weight in self.weights])

    # ---------------------------------------------------------------- edits

    def _toggle(self, trait: Trait) -> None:
        other = {Trait.BOSONS: Trait.FERMIONS, Trait.FERMIONS: Trait.BOSONS}.get(trait)
        if other is not None and self.traits[trait].isChecked() and self.traits[other].isChecked():
            # No atom is both.
            self.traits[other].blockSignals(True)
            self.traits[other].setChecked(False)
            self.traits[other].blockSignals(False)
        traits = tuple(one for one, box in self.traits.items() if box.isChecked())
        self.sieve = Sieve(traits=traits, bounds=self.sieve.bounds)
        self.changed.emit()

    def _add_bound(self, name: str, direction: int, text: str) -> None:
        try:
            bound = read_bound(f"{name} {'>=' if direction == 0 else '<='} {text}")
        except ValueError as error:
            self.limits.say(str(error))
            return
        others = tuple(b for b in self.sieve.bounds if (b.name, b.least) != (bound.name, bound.least))
        self._take(Sieve(traits=self.sieve.traits, bounds=(*others, bound)), self.weights)
        self.limits.clear()

    def _add_weight(self, name: str, direction: int, text: str) -> None:
        try:
            weight = read_weight(f"{name}={text or '1'} {'more' if direction == 0 else 'less'}")
        except ValueError as error:
            self.weighing.say(str(error))
            return
        others = tuple(w for w in self.weights if w.name != weight.name)
        self._take(self.sieve, (*others, weight))
        self.weighing.clear()

    def _dropper(self, bound: Bound) -> Callable[[], None]:
        def drop() -> None:
            bounds = tuple(other for other in self.sieve.bounds if other is not bound)
            self._take(Sieve(traits=self.sieve.traits, bounds=bounds), self.weights)

        return drop

    def _lifter(self, weight: Weight) -> Callable[[], None]:
        return lambda: self._take(self.sieve, tuple(other for other in self.weights if other is not weight))

    def _take(self, sieve: Sieve, weights: tuple[Weight, ...]) -> None:
        self.sieve, self.weights = sieve, weights
        self._show()
        self.changed.emit()

    def _suggest_direction(self) -> None:
        column = COLUMNS.get(self.weighing.name)
        if column is not None:
            self.weighing.direction.setCurrentIndex(0 if column.more_is_better else 1)

    def _suggest_limit(self) -> None:
        column = COLUMNS.get(self.limits.name)
        if column is not None:
            self.limits.direction.setCurrentIndex(0 if column.more_is_better else 1)
            self.limits.text.setPlaceholderText(limit_kind(column).example)


def bound_text(bound: Bound) -> str:
    """A limit as it is read: "total lifetime ≥ 10 s"."""
    return f"{COLUMNS[bound.name].row.label} {'≥' if bound.least else '≤'} {bound.text}"


def weight_text(weight: Weight) -> str:
    """A weight as it is read: "2 × sag, less is better"."""
    way = "" if weight.more_is_better else _(", less is better")
    return f"{weight.weight:g} × {COLUMNS[weight.name].row.label}{way}"


class _Rules(QWidget):
    """Rules as chips, and a line to add one. added(name, direction, text) is sent with the column's name, the place of
    the chosen direction, and what was typed."""

    added = Signal(str, int, str)

    def __init__(self, word: str, directions: Sequence[str], example: str, tip: str) -> None:
        super().__init__()
        self.column, self.direction, self.text = Choice(), Choice(), QLineEdit()
        self.column.setMinimumContentsLength(18)
        self.direction.setMinimumContentsLength(4)
        _fill(self.column)
        self.direction.addItems(list(directions))
        self.column.setAccessibleName(f"{word}: {_('column')}")
        self.direction.setAccessibleName(f"{word}: {_('direction')}")
        self.text.setAccessibleName(f"{word}: {_('number')}")
        self.column.setToolTip(_("Which column"))
        self.text.setPlaceholderText(example)
        self.text.setToolTip(tip)
        self.text.setMaximumWidth(12 * self.fontMetrics().horizontalAdvance("0"))
        self.add = QToolButton()
        self.add.setText(_("Add"))
        self.add.setToolTip(tip)
        self.add.setAccessibleName(tip)
        self.error = QLabel()
        self.error.setObjectName("fieldError")
        self.error.setWordWrap(True)
        self.error.hide()
        self.chips = Flow()
        line = QHBoxLayout()
        line.setSpacing(4)
        for widget in (self.column, self.direction, self.text, self.add):
            line.addWidget(widget)
        line.addStretch(1)
        grid = QGridLayout(self)
        grid.setContentsMargins(0, 0, 0, 0)
        grid.setVerticalSpacing(2)
        grid.addLayout(line, 0, 0)
        grid.addLayout(self.chips, 1, 0)
        grid.addWidget(self.error, 2, 0)
        self.add.clicked.connect(self._send)
        self.text.returnPressed.connect(self._send)

    @property
    def name(self) -> str:
        return str(self.column.currentData() or "")

    def _send(self) -> None:
        self.say("")
        self.added.emit(self.name, self.direction.currentIndex(), self.text.text().strip())

    def say(self, sentence: str) -> None:
        """What is wrong with what was typed; empty takes it back."""
        self.error.setText(sentence)
        self.error.setVisible(bool(sentence))
        self.text.setProperty("invalid", bool(sentence))
        self.text.style().polish(self.text)

    def clear(self) -> None:
        self.text.clear()
        self.say("")

    def show_chips(self, chips: Sequence[tuple[str, Callable[[], None]]]) -> None:
        """One button a rule, which takes it away."""
        while (item := self.chips.takeAt(0)) is not None:
            if (old := item.widget()) is not None:
                old.hide()
                old.deleteLater()
        for text, drop in chips:
            chip = QToolButton()
            chip.setObjectName("chip")
            chip.setText(f"{text}  ×")
            chip.setToolTip(_("Take away: {what}").format(what=text))
            chip.setAccessibleName(chip.toolTip())
            chip.clicked.connect(lambda _checked=False, act=drop: act())
            self.chips.addWidget(chip)

    def chip_texts(self) -> tuple[str, ...]:
        """What stands on the chips."""
        items = (self.chips.itemAt(place) for place in range(self.chips.count()))
        widgets = (item.widget() for item in items if item is not None)
        return tuple(widget.text().removesuffix("  ×") for widget in widgets if isinstance(widget, QToolButton))


def _fill(choice: QComboBox) -> None:
    """All columns, by heading."""
    for group in Group:
        for column in columns_in(group):
            choice.addItem(column.row.label, column.name)
            choice.setItemData(choice.count() - 1, f"{group.value}: {column.row.symbol}", Qt.ItemDataRole.ToolTipRole)
