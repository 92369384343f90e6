"""Exact limits of a plot, typed."""

from __future__ import annotations

from decimal import Decimal

from PySide6.QtWidgets import QDialog, QDialogButtonBox, QGridLayout, QLabel, QLineEdit, QVBoxLayout, QWidget

from app.figures.picture import Axis, Picture
from app.figures.ticks import raised
from app.kinds import EVERYDAY, Kind
from app.unit_text import exact_factor, normal_unit
from app.units import QuantityError, best_unit, exact_text, format_quantity, localised, read_quantity
from app.window.views import View, view_of

_PREFIXED = {"K": ("K", "mK", "µK", "nK", "pK"), "m": ("m", "mm", "µm", "nm")}
_PLAIN = ("", "1", "%")  # a share in percent is typed, and read, as the number on its axis


def kind_of(axis: Axis) -> Kind:
    """What may be typed as a limit of an axis: its own unit, and prefixed ones where ticks are prefixed."""
    unit = "" if axis.unit in _PLAIN else normal_unit(axis.unit)
    units = _PREFIXED.get(unit, (unit,)) if axis.prefixed else (unit,)
    return Kind(
        name=axis.label,
        si_unit=EVERYDAY[unit][1] if unit in EVERYDAY else unit,
        units=units,
        low=1e-300 if axis.log else -1e300,
        high=1e300,
        example=format_quantity(_si(axis, axis.low), best_unit(axis.low, units), digits=3),
    )


def place_text(axis: Axis, value: float, digits: int = 3) -> str:
    """A place on an axis, to read: "7.10 µm", "5.20e12 cm⁻³"; the nearest name where the places have names."""
    if axis.names:
        return axis.names[min(max(round(value), 0), len(axis.names) - 1)]
    si = _si(axis, value)
    text = format_quantity(si, best_unit(si, kind_of(axis).units), digits=digits)
    return raised(f"{text} %" if axis.unit == "%" else text)


def _si(axis: Axis, value: float) -> float:
    """A number of an axis in SI units, to the last digit what reading its text gives."""
    return value if axis.unit in _PLAIN else float(Decimal(repr(float(value))) * exact_factor(axis.unit))


def _on_axis(axis: Axis, value: float) -> float:
    return value if axis.unit in _PLAIN else float(Decimal(repr(value)) / exact_factor(axis.unit))


class LimitsDialog(QDialog):
    """Four fields and what is wrong with them, beside them; OK waits until all can be read."""

    def __init__(self, picture: Picture, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle("Limits of the plot")
        self._axes = (picture.x, picture.y)
        self.fields: list[QLineEdit] = []
        self.problem = QLabel()
        self.problem.setObjectName("fieldError")
        self.problem.setWordWrap(True)
        grid = QGridLayout()
        grid.setHorizontalSpacing(10)
        for row, axis in enumerate(self._axes):
            heading = QLabel(f"{axis.label} [%]" if axis.unit == "%" else axis.label)
            grid.addWidget(heading, row, 0)
            for column, (word, value) in enumerate((("from", axis.low), ("to", axis.high))):
                field = QLineEdit(self._text(axis, value))
                field.setAccessibleName(f"{axis.label} {word}")
                field.setToolTip(f"{word} which {axis.label} the plot runs, with its unit")
                field.textChanged.connect(self._check)
                label = QLabel(f"{word}")
                label.setBuddy(field)
                grid.addWidget(label, row, 1 + 2 * column)
                grid.addWidget(field, row, 2 + 2 * column)
                self.fields.append(field)
        buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Ok | QDialogButtonBox.StandardButton.Cancel)
        buttons.accepted.connect(self.accept)
        buttons.rejected.connect(self.reject)
        self.ok = buttons.button(QDialogButtonBox.StandardButton.Ok)
        column_layout = QVBoxLayout(self)
        column_layout.setContentsMargins(20, 16, 20, 12)
        column_layout.setSpacing(12)
        column_layout.addLayout(grid)
        column_layout.addWidget(self.problem)
        column_layout.addWidget(buttons)
        self.setMinimumWidth(440)
        self._view: View | None = view_of(picture)
        self._check()

    def _text(self, axis: Axis, value: float) -> str:
        kind, si = kind_of(axis), _si(axis, float(f"{value:.4g}"))
        return localised(exact_text(si, best_unit(si, kind.units), kind=kind), decimal_comma=self._comma)

    @property
    def _comma(self) -> bool:
        return self.locale().decimalPoint() == ","

    @property
    def view(self) -> View | None:
        """The limits as typed; None while they cannot be read."""
        return self._view

    def _check(self) -> None:
        self._view, problem = None, ""
        try:
            values = []
            for place, field in enumerate(self.fields):
                axis = self._axes[place // 2]
                read = read_quantity(field.text(), kind_of(axis), decimal_comma=self._comma)
                values.append(_on_axis(axis, read.value))
            for axis, low, high in zip(self._axes, values[::2], values[1::2], strict=True):
                if not low < high:
                    raise QuantityError(f"{axis.label} must run from a low to a high limit")
            self._view = (values[0], values[1], values[2], values[3])
        except QuantityError as error:
            problem = str(error)
        self.problem.setText(problem)
        self.ok.setEnabled(self._view is not None)
