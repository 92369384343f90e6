"""The Target form: what counts as degenerate, and how well the evaporation is assumed to do on the way."""

from __future__ import annotations

from PySide6.QtWidgets import QWidget

from app.plan import Plan
from app.widgets.form import Form
from physics.particles import Statistics
from physics.species import load_species


class TargetForm(Form):
    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__("Target", parent)
        self.efficiency = self.add_quantity("target.efficiency", "c", label="Efficiency γ")
        self.efficiency.setPlaceholderText("not assumed")
        self.threshold = self.add_quantity("target.reduced_temperature", "r", label="Threshold T/TF")
        self.threshold.setPlaceholderText("0.5")

    def show_plan(self, plan: Plan) -> None:
        self.efficiency.set_quantity(plan.target.efficiency)
        self.threshold.set_quantity(plan.target.reduced_temperature)
        fermions = load_species(plan.species.key).isotope.statistics is Statistics.FERMI
        self.show_row("target.reduced_temperature", fermions)
