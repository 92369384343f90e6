"""The Cloud form: how many atoms, how hot, and which description of the gas."""

from __future__ import annotations

from PySide6.QtWidgets import QWidget

from app.plan import PLAN_FIELDS, Plan
from app.widgets.form import Choice, Form
from physics.cloud import AVAILABLE_MODELS
from physics.particles import Statistics
from physics.species import load_species

_MODEL = PLAN_FIELDS["cloud.model"]


class CloudForm(Form):
    def __init__(self, parent: QWidget | None = None, *, owner: str = "") -> None:
        super().__init__("Cloud", parent, owner=owner)
        self.atoms = self.add_quantity("cloud.atoms", "a")
        self.temperature = self.add_quantity("cloud.temperature", "t")
        self.model = Choice()
        self.model.addItem("usual", None)
        for model in AVAILABLE_MODELS:
            self.model.addItem(model.value, model)
        self.model.activated.connect(lambda _index: self.edit(_MODEL.path, self.model.currentData()))
        self.add_row(_MODEL.path, _MODEL.label, "m", self.model, _MODEL.tip)

    def show_plan(self, plan: Plan) -> None:
        self.atoms.set_quantity(plan.cloud.atoms)
        self.temperature.set_quantity(plan.cloud.temperature)
        species = load_species(plan.species.key)
        bosons = species.isotope.statistics is Statistics.BOSE
        self.model.setItemText(0, "usual (semi-ideal)" if bosons else "usual (ideal)")
        self.model.setCurrentIndex(self.model.findData(plan.cloud.model))
        components = plan.species.spin_components or species.state(plan.species.state).spin_components
        self.show_note("cloud.atoms", f"in each of {components} spin states" if components > 1 else "")
