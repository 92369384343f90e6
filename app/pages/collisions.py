"""The Collisions page: how fast atoms rethermalise, are lost and are heated, and what of it limits."""

from __future__ import annotations

from functools import partial
from typing import Any

from PySide6.QtWidgets import QButtonGroup, QHBoxLayout, QLabel, QRadioButton, QWidget

from app.engine import Against, rates_answer
from app.figures.picture import Role
from app.figures.rates import limits_sentence, rate_text, rates_picture, unknown_sentence
from app.figures.theme import Theme
from app.newest import Job
from app.plan import Plan
from app.widgets.limits_dialog import place_text
from app.widgets.single_plot_page import SinglePlotPage

NOTHING_KNOWN = (
    "Give a scattering length or a magnetic field in the Species form, and what is known of losses: a background "
    "lifetime, or rate constants."
)
_NAMES = {Against.TEMPERATURE: "Temperature", Against.ATOMS: "Atom number"}


class CollisionsPage(SinglePlotPage):
    title = "Collisions"
    plot_name = "Rates of collisions, losses and heating"

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(theme, parent)
        options = QHBoxLayout()
        options.setContentsMargins(0, 2, 0, 2)
        options.setSpacing(12)
        options.addWidget(QLabel("Against"))
        self.choice = QButtonGroup(self)
        for place, (against, name) in enumerate(_NAMES.items()):
            button = QRadioButton(name)
            button.setAccessibleName(f"Rates against {name.lower()}")
            button.setToolTip(f"{name} runs along the horizontal axis, through the cloud")
            button.setChecked(against is Against.TEMPERATURE)
            self.choice.addButton(button, place)
            options.addWidget(button)
        options.addStretch(1)
        self.choice.idToggled.connect(self._choose)
        self.options.addLayout(options)
        self.plot.canvas.pointer_moved.connect(self._read_pointer)

    @property
    def against(self) -> Against:
        """What runs along the horizontal axis."""
        return tuple(_NAMES)[max(self.choice.checkedId(), 0)]

    def part(self, plan: Plan) -> Job | None:
        return partial(rates_answer, plan, self.against)

    def take_part(self, answer: Any) -> None:
        picture = rates_picture(answer)
        if not any(curve.role is not Role.CLOUD for curve in picture.curves if curve.name):
            self.show_empty(limits_sentence(answer.now), NOTHING_KNOWN)
        else:
            self.show_plot(lambda: picture, limits_sentence(answer.now), unknown_sentence(answer.now))

    def _choose(self, _place: int, chosen: bool) -> None:
        if chosen:
            self.plot.set_view(None)
            self.part_wanted.emit()

    def _read_pointer(self, place: tuple[float, float] | None) -> None:
        picture = self.plot.canvas.picture
        if place is None or picture is None:
            self.bar.status.say("")
        else:
            x, rate = place
            self.bar.status.say(f"{picture.x.label} = {place_text(picture.x, x)}   {rate_text(rate)}")
