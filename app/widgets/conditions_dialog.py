"""Conditions that one candidate, or all of them, are compared in: atoms, temperature, scattering length, magnetic field
or the range in which it is sought."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING, Any

from PySide6.QtWidgets import QDialog, QDialogButtonBox, QGridLayout, QLabel, QVBoxLayout, QWidget

from app.candidate_choices import CandidateChoice, CandidatesChoice
from app.candidate_fields import CANDIDATE_FIELDS, CANDIDATES_FIELDS
from app.language import translate as _
from app.plan import PlanError
from app.units import Quantity
from app.widgets.quantity_field import QuantityField

if TYPE_CHECKING:
    from collections.abc import Mapping

    from app.plan_field import PlanField

_SOUGHT = ("lowest_field", "highest_field", "wanted_length")
_OPEN = {
    "field": _("not used"),
    "scattering_length": _("as the data have it"),
    "lowest_field": _("none is sought"),
    "highest_field": _("none is sought"),
    "wanted_length": _("the best for collisions"),
}


class _Conditions(QDialog):
    """Some keys of a choice, which `choice` has as they are typed. OK waits until all can be read."""

    def __init__(
        self,
        choice: Any,
        fields: Mapping[str, PlanField],
        usual: Mapping[str, str],
        about: str,
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(parent)
        self.choice = choice
        self.fields: dict[str, QuantityField] = {}
        self.error = QLabel()
        self.error.setObjectName("fieldError")
        self.error.setWordWrap(True)
        said = QLabel(about)
        said.setObjectName("plotStatus")
        said.setWordWrap(True)
        grid = QGridLayout()
        for line, (name, field) in enumerate(fields.items()):
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
        column.addWidget(said)
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


class ConditionsDialog(_Conditions):
    """Conditions of one candidate's own; `choice` is the candidate as it is typed."""

    choice: CandidateChoice

    def __init__(self, choice: CandidateChoice, usual: Mapping[str, str], parent: QWidget | None = None) -> None:
        """usual : name of a condition -> what holds where the candidate has none of its own"""
        names = ("atoms", "temperature", "field", "scattering_length", *_SOUGHT)
        fields = {name: CANDIDATE_FIELDS[name] for name in names}
        about = _("What is left empty is as the plan and the data have it.")
        super().__init__(choice, fields, usual, about, parent)
        self.setWindowTitle(f"{choice.key}  {choice.state}")


class FieldsDialog(_Conditions):
    """The range in which a field is sought for every candidate; `choice` is what the plan says of candidates."""

    choice: CandidatesChoice

    def __init__(self, choice: CandidatesChoice, parent: QWidget | None = None) -> None:
        fields = {name: CANDIDATES_FIELDS[name] for name in _SOUGHT}
        about = _(
            "Each state that a field tunes is judged at the best field of this range, as far as its resonances are "
            "known. A candidate with a field or a scattering length of its own keeps that."
        )
        super().__init__(choice, fields, {}, about, parent)
        self.setWindowTitle(_("Best fields"))
