"""What the user chooses for a comparison, by dialogs or at once: each ends in a plan."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, Signal
from PySide6.QtWidgets import QDialog

from app.answers.candidates import candidates_of
from app.candidate_choices import basis_of
from app.candidate_selection import with_candidates, with_conditions, with_species_of
from app.language import translate as _
from app.widgets.candidate_bar import BASES
from app.widgets.conditions_dialog import ConditionsDialog, FieldsDialog
from app.widgets.species_dialog import SpeciesDialog

if TYPE_CHECKING:
    from PySide6.QtWidgets import QWidget

    from app.answers.candidate_row import CandidateRow
    from app.plan import Plan


class CandidateQuestions(QObject):
    """Attribute: plan, that whose candidates are on show; None before there is one, and nothing is asked then.

    Signal: plan_edited(Plan, what, merge key).
    """

    plan_edited = Signal(object, str, str)

    def __init__(self, page: QWidget) -> None:
        super().__init__(page)
        self._page = page
        self.plan: Plan | None = None

    def choose_basis(self, place: int) -> None:
        """Compare in the way at this place of `BASES`."""
        if self.plan is None:
            return
        basis, start = BASES[place]
        plan = self.plan
        choice = replace(plan.candidates, basis=basis, start=start)
        if choice != replace(plan.candidates, basis=basis_of(plan)):
            self.plan_edited.emit(replace(plan, candidates=choice), _("basis of the comparison"), "")

    def ask_species(self) -> None:
        """Let the user tick the candidates."""
        if self.plan is None:
            return
        plan = self.plan
        which = {(c.key, c.state or "") for c in candidates_of(plan)}
        dialog = SpeciesDialog(which, self._page)
        if dialog.exec() == QDialog.DialogCode.Accepted:
            changed = with_candidates(plan, dialog.chosen)
            if changed.candidates != plan.candidates:
                self.plan_edited.emit(changed, _("species to compare"), "")
        dialog.deleteLater()

    def ask_fields(self) -> None:
        """Let the user give the range in which the best field of every candidate is sought."""
        if self.plan is None:
            return
        plan = self.plan
        dialog = FieldsDialog(plan.candidates, self._page)
        if dialog.exec() == QDialog.DialogCode.Accepted and dialog.choice != plan.candidates:
            self.plan_edited.emit(replace(plan, candidates=dialog.choice), _("fields of the comparison"), "")
        dialog.deleteLater()

    def ask_conditions(self, row: CandidateRow) -> None:
        """Let the user give a candidate an atom number, a temperature, a field or a length of its own."""
        if self.plan is None:
            return
        plan, species = self.plan, row.plan.species
        usual = {"atoms": plan.cloud.atoms.text, "temperature": plan.cloud.temperature.text}
        usual["field"] = "" if species.field is None else species.field.text
        dialog = ConditionsDialog(row.candidate, usual, self._page)
        if dialog.exec() == QDialog.DialogCode.Accepted and dialog.choice != row.candidate:
            changed = with_conditions(plan, dialog.choice)
            self.plan_edited.emit(changed, _("conditions of {key}").format(key=row.key), "")
        dialog.deleteLater()

    def use(self, row: CandidateRow) -> None:
        """The candidate becomes the plan's own species."""
        if self.plan is not None:
            self.plan_edited.emit(with_species_of(self.plan, row), _("species {key}").format(key=row.key), "")
