"""Conditions of its own that a candidate is compared in: atoms, temperature, magnetic field, scattering length."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

from PySide6.QtWidgets import QDialog, QDialogButtonBox, QGridLayout, QLabel, QVBoxLayout, QWidget

from app.candidate_choices import CandidateChoice
from app.candidate_fields import CANDIDATE_FIELDS
from app.language import translate as _
from app.plan import PlanError
from app.units import Quantity
from app.widgets.quantity_field import QuantityField

_NAMES = ("atoms", "temperature", "field", "scattering_length")
_OPEN = {"field": _("not used"), "scattering_length": _("as the data have it")}


class ConditionsDialog(QDialog):
    """`choice` is the candidate as it is typed. OK waits until all can be read."""

    def __init__(self, choice: CandidateChoice, usual: dict[str, str], parent: QWidget | None = None) -> None:
        """usual : name of a condition -> what holds where the candidate has none of its own"""
        super().__init__(parent)
        self.setWindowTitle(f"{choice.key}  {choice.state}")
        self.choice = choice
        self.fields: dict[str, QuantityField] = {}
        self.error = QLabel()
        self.error.setObjectName("fieldError")
        self.error.setWordWrap(True)
        about = QLabel(_("What is left empty is as the plan and the data have it."))
        about.setObjectName("plotStatus")
        grid = QGridLayout()
        for line, name in enumerate(_NAMES):
            field = CANDIDATE_FIELDS[name]
            assert field.kind is not None
            entry = QuantityField(field.kind, field.label, tip=field.tip, optional=True)
            entry.setPlaceholderText(usual.get(name) or _OPEN.get(name, ""))
            entry.set_quantity(getattr(choice, name))
            entry.changed.connect(self._change)
            entry.error_changed.connect(self._judge)
            label = QLabel(field.label)
            label.setBuddy(entry)
            grid.addWidget(label, line, 0)
            grid.addWidget(entry, line, 1)
            self.fields[name] = entry
        self.buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Ok | QDialogButtonBox.StandardButton.Cancel)
        self.buttons.accepted.connect(self.accept)
        self.buttons.rejected.connect(self.reject)
        column = QVBoxLayout(self)
        column.addWidget(about)
        column.addLayout(grid)
        column.addWidget(self.error)
        column.addWidget(self.buttons)
        self.setMinimumWidth(46 * self.fontMetrics().horizontalAdvance("0"))
        self._judge()

    def _change(self, _quantity: Quantity | None) -> None:
        typed: dict[str, Any] = {name: field.quantity for name, field in self.fields.items()}
        try:
            self.choice = replace(self.choice, **typed)
        except PlanError as error:
            self._judge(str(error))
        else:
            self._judge()

    def _judge(self, sentence: str = "") -> None:
        wrong = [field.error_text for field in self.fields.values() if field.error_text]
        said = sentence or (wrong[0] if wrong else "")
        self.error.setText(said)
        self.error.setVisible(bool(said))
        self.buttons.button(QDialogButtonBox.StandardButton.Ok).setEnabled(not said)
