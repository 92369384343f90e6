"""What the page of a trap shows, to choose: cuts, a section or a scan, and of what."""

from __future__ import annotations

from collections.abc import Sequence
from enum import Enum

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QButtonGroup, QComboBox, QHBoxLayout, QLabel, QRadioButton, QWidget


class TrapView(Enum):
    """Ways to look at a trap; the value is the word on the button."""

    CUTS = "Cuts"
    SECTION = "Section"
    SCAN = "Scan"


_TIPS = {
    TrapView.CUTS: "The potential along each axis and along gravity",
    TrapView.SECTION: "Contours of the potential over a plane",
    TrapView.SCAN: "Frequencies, depth and sag while one control is turned",
}
RANGES: tuple[tuple[str, tuple[float, float]], ...] = (
    ("0.9 to 1.1 times", (0.9, 1.0 / 0.9)),
    ("½ to 2 times", (0.5, 2.0)),
    ("⅕ to 5 times", (0.2, 5.0)),
    ("1/20 to 20 times", (0.05, 20.0)),
)
_USUAL_RANGE = 1


class TrapOptions(QWidget):
    """changed() is sent when the user chooses something else."""

    changed = Signal()

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 2, 0, 2)
        row.setSpacing(12)
        self.views = QButtonGroup(self)
        for place, view in enumerate(TrapView):
            button = QRadioButton(view.value)
            button.setToolTip(_TIPS[view])
            button.setAccessibleName(f"{view.value}: {_TIPS[view].lower()}")
            button.setChecked(view is TrapView.CUTS)
            self.views.addButton(button, place)
            row.addWidget(button)
        self.plane = _combo("Plane", "Plane of the section, through the minimum")
        self.control = _combo("Control", "What is turned")
        self.range = _combo("Range", "From which to which multiple of where it stands")
        self.range.addItems([text for text, _ in RANGES])
        self.range.setCurrentIndex(_USUAL_RANGE)
        self._plane_label, self._control_label, self._range_label = QLabel("Plane"), QLabel("Turn"), QLabel("over")
        row.addSpacing(8)
        for label, combo in (
            (self._plane_label, self.plane),
            (self._control_label, self.control),
            (self._range_label, self.range),
        ):
            pair = QHBoxLayout()
            pair.setSpacing(6)
            pair.addWidget(label)
            pair.addWidget(combo)
            row.addLayout(pair)
            combo.currentIndexChanged.connect(self.changed)
        row.addStretch(1)
        self.views.idToggled.connect(self._choose_view)
        self._show_fitting()

    @property
    def view(self) -> TrapView:
        return tuple(TrapView)[max(self.views.checkedId(), 0)]

    def show_view(self, view: TrapView) -> None:
        """Choose a view, as its button does."""
        self.views.button(tuple(TrapView).index(view)).setChecked(True)

    @property
    def factors(self) -> tuple[float, float]:
        """Least and largest factor of a scan."""
        return RANGES[max(self.range.currentIndex(), 0)][1]

    def offer_planes(self, names: Sequence[str]) -> None:
        """Offer these planes; the chosen one stays if it is among them."""
        _offer(self.plane, names)

    def offer_controls(self, names: Sequence[str]) -> None:
        """Offer these controls; the chosen one stays if it is among them."""
        _offer(self.control, names)
        self._show_fitting()

    def _choose_view(self, _place: int, chosen: bool) -> None:
        if chosen:
            self._show_fitting()
            self.changed.emit()

    def _show_fitting(self) -> None:
        scan = self.view is TrapView.SCAN and self.control.count() > 0
        for widget in (self._plane_label, self.plane):
            widget.setVisible(self.view is TrapView.SECTION)
        for widget in (self._control_label, self.control, self._range_label, self.range):
            widget.setVisible(scan)


def _combo(name: str, tip: str) -> QComboBox:
    combo = QComboBox()
    combo.setAccessibleName(name)
    combo.setToolTip(tip)
    combo.setSizeAdjustPolicy(QComboBox.SizeAdjustPolicy.AdjustToContents)
    return combo


def _offer(combo: QComboBox, names: Sequence[str]) -> None:
    if [combo.itemText(place) for place in range(combo.count())] == list(names):
        return
    chosen = combo.currentText()
    combo.blockSignals(True)
    combo.clear()
    combo.addItems(list(names))
    combo.setCurrentIndex(max(combo.findText(chosen), 0))
    combo.blockSignals(False)
