"""The Species form: which atoms, in which state, and how they collide."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QCompleter, QWidget

from app.plan import PLAN_FIELDS, Plan
from app.tuning_words import length_note
from app.widgets.form import Choice, Form
from physics.constants import atomic_mass
from physics.particles import Certainty
from physics.scattering import LengthInUse
from physics.species import Sourced, Species, load_species, species_keys

_KEY = PLAN_FIELDS["species.key"]
_STATE = PLAN_FIELDS["species.state"]
_SPINS = PLAN_FIELDS["species.spin_components"]
_LENGTH = "species.scattering_length"
_FIELD = "species.field"
MOST_SPINS = 10
LONG_NAME = 20  # characters; a longer name is written out under its box

_CERTAINTY = {
    Certainty.SEEN: "seen",
    Certainty.MEMORY: "recalled",
    Certainty.COMPUTED: "computed",
}


class SpeciesForm(Form):
    def __init__(self, parent: QWidget | None = None, *, owner: str = "") -> None:
        super().__init__("Species", parent, owner=owner)
        self.isotope = Choice()
        self.isotope.setEditable(True)
        self.isotope.setInsertPolicy(Choice.InsertPolicy.NoInsert)
        self.isotope.addItems(species_keys())
        completer = QCompleter(self.isotope.model(), self.isotope)
        completer.setFilterMode(Qt.MatchFlag.MatchContains)
        completer.setCaseSensitivity(Qt.CaseSensitivity.CaseInsensitive)
        completer.setCompletionMode(QCompleter.CompletionMode.PopupCompletion)
        self.isotope.setCompleter(completer)
        completer.activated.connect(self._choose_isotope)
        self.isotope.textActivated.connect(self._choose_isotope)
        line = self.isotope.lineEdit()
        assert line is not None
        line.editingFinished.connect(self._isotope_typed)
        line.setPlaceholderText("type to search, such as Rb")
        line.setAccessibleName(f"Isotope{owner}, typed")
        self.add_row(_KEY.path, "Isotope", "i", self.isotope, _KEY.tip)
        self.state = Choice()
        self.state.activated.connect(lambda _index: self._choose_state())
        self.add_row(_STATE.path, _STATE.label, "s", self.state, _STATE.tip)
        self.spins = Choice()
        self.spins.addItem("", None)
        for count in range(1, MOST_SPINS + 1):
            self.spins.addItem(str(count), count)
        self.spins.activated.connect(lambda _index: self.edit(_SPINS.path, self.spins.currentData()))
        self.add_row(_SPINS.path, _SPINS.label, "n", self.spins, _SPINS.tip)
        self.length = self.add_quantity(_LENGTH, "l")
        self.field = self.add_quantity(_FIELD, "g")
        self.field.setPlaceholderText("not used")
        self._species: Species | None = None

    def _isotope_typed(self) -> None:
        self._choose_isotope(self.isotope.currentText())

    def _choose_isotope(self, text: str) -> None:
        if self._plan is None:
            return
        try:
            key = load_species(text.strip()).key
        except ValueError as error:
            self.show_problem(_KEY.path, str(error))
            return
        self.show_problem(_KEY.path, "")
        if key != self._plan.species.key:
            self.edit(_KEY.path, key)
        else:
            self.isotope.setCurrentText(key)

    def _choose_state(self) -> None:
        if self._plan is None:
            return
        name = self.state.currentData()
        if name != self._shown_state(self._plan):
            self.edit(_STATE.path, name)

    def _shown_state(self, plan: Plan) -> str:
        return load_species(plan.species.key).state(plan.species.state).name

    def show_plan(self, plan: Plan) -> None:
        species = load_species(plan.species.key)
        if species is not self._species:
            self._species = species
            self.state.clear()
            for state in species.states:
                self.state.addItem(state.name, state.name)
                self.state.setItemData(self.state.count() - 1, state.note or state.name, Qt.ItemDataRole.ToolTipRole)
            self.show_problem(_KEY.path, "")
        if not self.problems and self.isotope.currentText() != species.key:
            self.isotope.setCurrentText(species.key)
        state = species.state(plan.species.state)
        self.state.setCurrentIndex(self.state.findData(state.name))
        self.show_note(_STATE.path, state.name if len(state.name) > LONG_NAME else "")
        isotope = species.isotope
        self.show_note(_KEY.path, f"{isotope.statistics.value}, {isotope.mass.value / atomic_mass:.6g} u")
        self.spins.setItemText(0, f"{state.spin_components}, as the state")
        self.spins.setCurrentIndex(self.spins.findData(plan.species.spin_components))
        self.length.set_quantity(plan.species.scattering_length)
        self.length.setPlaceholderText(_told(state.scattering_length))
        self.field.set_quantity(plan.species.field)

    def show_length(self, length: LengthInUse) -> None:
        """What the magnetic field, where one is given, makes of the scattering length."""
        given = self._plan is not None and self._plan.species.field is not None
        self.show_note(_FIELD, length_note(length) if given else "")


def _told(number: Sourced | None) -> str:
    """A number of the data and how sure it is, for the empty field that it stands in for."""
    return "not known" if number is None else f"{number.text} ({_CERTAINTY[number.certainty]})"
