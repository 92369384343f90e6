"""The Slices page: chosen quantities against temperature at this N, and against N at this temperature."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from functools import partial
from typing import Any

from PySide6.QtWidgets import QGridLayout, QHBoxLayout, QLabel, QMenu, QToolButton, QWidget

from app.engine import Against, SlicesAnswer, slices_answer
from app.figures.slices import slice_picture
from app.figures.theme import Theme
from app.plan import Plan
from app.quantities import QUANTITIES, Group, Need, rows_in
from app.widgets.page import Page
from app.widgets.plot import Plot
from app.widgets.scrolled import scrolled

MOST = 4  # quantities at a time: more would be too small to read
USUAL_BOSONS = ("peak_phase_space_density", "condensate_fraction")
USUAL_FERMIONS = ("peak_phase_space_density", "reduced_temperature")


class SlicesPage(Page):
    title = "Slices"

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(theme, parent)
        self._chosen: tuple[str, ...] = ()
        self._answer: SlicesAnswer | None = None
        self._rows: dict[str, tuple[Plot, Plot]] = {}
        options = QHBoxLayout()
        options.setContentsMargins(14, 6, 14, 2)
        self.button = QToolButton()
        self.button.setText("Quantities ▾")
        self.button.setToolTip(f"Choose up to {MOST} quantities to plot")
        self.button.setAccessibleName("Choose the quantities to plot")
        self.button.setPopupMode(QToolButton.ToolButtonPopupMode.InstantPopup)
        self.menu = QMenu(self.button)
        self.menu.aboutToShow.connect(self._fill_menu)
        self.button.setMenu(self.menu)
        self.heading = QLabel()
        self.heading.setObjectName("plotStatus")
        options.addWidget(self.button)
        options.addWidget(self.heading, 1)
        self._grid = QGridLayout()
        self._grid.setContentsMargins(0, 0, 0, 0)
        self._grid.setSpacing(0)
        body = QWidget()
        body.setLayout(self._grid)
        self.column.addLayout(options)
        self.column.addWidget(scrolled(body), 1)
        self.column.addWidget(self.bar)
        self._set_rows(self.chosen)

    @property
    def chosen(self) -> tuple[str, ...]:
        """Names of the quantities on show: the user's choice as far as this gas has them, else the usual ones."""
        bosons = self.cloud is None or self.cloud.bosons
        fitting = tuple(name for name in self._chosen if _fits(name, bosons))
        return fitting or (USUAL_BOSONS if bosons else USUAL_FERMIONS)

    def choose(self, names: tuple[str, ...]) -> None:
        """Show these quantities."""
        self._chosen = tuple(name for name in names if name in QUANTITIES)[:MOST]
        self.memory_changed.emit()
        self.part_wanted.emit()

    def memory(self) -> dict[str, tuple[str, ...]]:
        """The quantities that the user chose."""
        return {"chosen": self._chosen}

    def recall(self, texts: Mapping[str, Sequence[str]], units: Mapping[str, str]) -> None:
        self.choose(tuple(texts.get("chosen", ())))

    def _fill_menu(self) -> None:
        self.menu.clear()
        bosons = self.cloud is None or self.cloud.bosons
        chosen = self.chosen
        for group in Group:
            rows = [row for row in rows_in(group) if _fits(row.name, bosons)]
            if not rows:
                continue
            self.menu.addSection(group.value)
            for row in rows:
                action = self.menu.addAction(row.label)
                action.setCheckable(True)
                action.setChecked(row.name in chosen)
                action.setEnabled(row.name in chosen or len(chosen) < MOST)
                action.setToolTip(row.formula)
                action.triggered.connect(partial(self._toggle, row.name))

    def _toggle(self, name: str, checked: bool) -> None:
        chosen = self.chosen
        names = (*chosen, name) if checked else tuple(other for other in chosen if other != name)
        if names:
            self.choose(names)

    def part(self, plan: Plan) -> Callable[[], SlicesAnswer] | None:
        return partial(slices_answer, plan, self.chosen)

    def take_part(self, answer: Any) -> None:
        self._answer = answer
        self._set_rows(answer.names)
        for name, plots in self._rows.items():
            for plot, against in zip(plots, Against, strict=True):
                plot.show(partial(slice_picture, answer, name, against))

    def _set_rows(self, names: tuple[str, ...]) -> None:
        """One row of two canvases for each quantity; those that stay are kept."""
        if tuple(self._rows) == names:
            return
        for name in [name for name in self._rows if name not in names]:
            for plot in self._rows.pop(name):
                self.remove_plot(plot)
        kept = dict(self._rows)
        self._rows = {name: kept.get(name) or self._new_row(name) for name in names}
        self._plots[:] = [plot for plots in self._rows.values() for plot in plots]
        for line, plots in enumerate(self._rows.values()):
            for place, plot in enumerate(plots):
                plot.canvas.setMinimumHeight(170)
                self._grid.addWidget(plot.canvas, line, place)
                self._grid.setColumnStretch(place, 1)
            self._grid.setRowStretch(line, 1)
        for line in range(len(self._rows), MOST):
            self._grid.setRowStretch(line, 0)

    def _new_row(self, name: str) -> tuple[Plot, Plot]:
        label = QUANTITIES[name].label
        plots = (self.add_plot(f"{label} against temperature"), self.add_plot(f"{label} against atom number"))
        for plot in plots:
            plot.canvas.pointer_moved.connect(partial(self._read_pointer, plot))
        return plots

    def _read_pointer(self, plot: Plot, place: tuple[float, float] | None) -> None:
        self.bar.status.say(self.pointer_text(plot, place))


def _fits(name: str, bosons: bool) -> bool:
    return (Need.FERMIONS if bosons else Need.BOSONS) not in QUANTITIES[name].needs
