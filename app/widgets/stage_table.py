"""Where the cloud stands after each stage of a ramp, how efficient the stage was, and where its atoms went."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import TYPE_CHECKING

from PySide6.QtWidgets import QWidget

from app.figures.picture import Role
from app.figures.theme import LIGHT, Theme
from app.ramp_words import duration
from app.transfer_words import handed_text
from app.widgets.fact_table import FactRow, FactTable
from app.widgets.loss_bar import LossBar, Part
from app.words import number, temperature
from physics.evaporation_rates import Process

if TYPE_CHECKING:
    from app.answers.ramp import RampAnswer
    from physics.evaporation import Evaporation
    from physics.evaporation_budget import Budget, StageSummary

HEADINGS = ("after", "t", "N", "T", "D", "η", "γ", "where the atoms went")
_TIP = (
    "N atoms, T temperature, D peak phase-space density and η = U/kT at the end of the stage; γ = −d ln D/d ln N over "
    "it, of the classical cloud"
)
_LOSSES: Mapping[Process, tuple[str, str, Role | None]] = {
    Process.EVAPORATED: ("evaporated", "evap.", None),
    Process.SPILLED: ("spilled", "spill", None),
    Process.BACKGROUND: ("background gas", "gas", Role.THIRD),
    Process.TWO_BODY: ("two-body", "2-b", Role.FOURTH),
    Process.THREE_BODY: ("three-body", "3-b", Role.SECOND),
    Process.SPIN_FLIPS: ("spin flips", "flips", Role.THRESHOLD_OF_MODEL),
    Process.TRANSFER: ("transfer", "tr.", Role.FIRST),
}
"""Name, short name, and whose colour it has."""

_LONGEST_NAME = 17
_LEAST = 0.005  # share of the lost atoms worth a part


class StageTable(FactTable):
    """A row for the start, one for each stage that began, before it what its trap has caught, and one for the whole."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__("Cloud after each stage", parent)
        self._theme = LIGHT
        self._bars: list[LossBar] = []

    def show_ramp(self, answer: RampAnswer) -> None:
        """Show a simulated ramp."""
        run = answer.run
        rows: list[FactRow] = []
        parts: list[tuple[Part, ...]] = []
        if len(run.time):
            rows.append(FactRow(name="start", cells=(*_cloud_cells(run, 0, answer.begin), "", ""), tip=_TIP))
            parts.append(())
        for stage in run.stages:
            handed = handed_text(answer, stage)
            if handed:
                name = f"into {stage.number + 1 + answer.first}"
                cells = (*_cloud_cells(run, stage.first, answer.begin), "", handed)
                rows.append(FactRow(name=name, cells=cells, tip=handed))
                parts.append(_caught(stage))
            shares = loss_parts(stage.budget)
            name = f"{stage.number + 1 + answer.first}  {_brief(stage.label)}".strip()
            cells = (*_cloud_cells(run, stage.last, answer.begin), _gamma(stage), _told(shares))
            tip = "\n".join(line for line in (stage.label, _told(shares), _TIP) if line)
            rows.append(FactRow(name=name, cells=cells, tip=tip))
            parts.append(shares)
        if len(run.stages) > 1:
            shares = loss_parts(run.budget)
            rows.append(FactRow(name="in all", cells=("", "", "", "", "", _whole_gamma(run), _told(shares)), tip=_TIP))
            parts.append(shares)
        self.show_rows(HEADINGS, rows)
        self._show_bars(parts)

    def _show_bars(self, parts: list[tuple[Part, ...]]) -> None:
        column = len(HEADINGS) - 1
        for place, shares in enumerate(parts):
            bar = self.cellWidget(place, column)
            if not isinstance(bar, LossBar):
                bar = LossBar()
                bar.set_theme(self._theme)
                self.setCellWidget(place, column, bar)
            bar.show_parts(shares)

    def set_theme(self, theme: Theme) -> None:
        self._theme = theme
        for place in range(self.rowCount()):
            bar = self.cellWidget(place, len(HEADINGS) - 1)
            if isinstance(bar, LossBar):
                bar.set_theme(theme)


def _caught(stage: StageSummary) -> tuple[Part, ...]:
    """What of the atoms a new trap has caught, and what not."""
    shares = ((stage.caught, "caught", None), (1.0 - stage.caught, "not caught", Role.FIRST))
    return tuple(Part(name, share, name, role) for share, name, role in shares if share >= _LEAST)


def _brief(label: str) -> str:
    """A label as far as there is room; its tip has all of it."""
    return label if len(label) <= _LONGEST_NAME else f"{label[: _LONGEST_NAME - 1].rstrip()}…"


def loss_parts(budget: Budget) -> tuple[Part, ...]:
    """Shares of the atoms lost, those too small to be seen left out."""
    found = []
    for process in budget.atoms:
        share = budget.share(process)
        if share >= _LEAST:
            name, short, role = _LOSSES.get(process, (process.label, process.label[:4], Role.CLASSICAL))
            found.append(Part(name, share, short, role))
    return tuple(found)


def _told(parts: tuple[Part, ...]) -> str:
    return ", ".join(part.text for part in parts) or "no atom lost"


def _cloud_cells(run: Evaporation, row: int, begin: float) -> tuple[str, ...]:
    rows = run.rows
    return (
        duration(float(run.time[row]) + begin),
        number(float(rows.atoms[row])),
        temperature(float(rows.temperature[row])),
        number(float(rows.peak_phase_space_density[row])),
        number(float(rows.truncation[row])),
    )


def _gamma(stage: StageSummary) -> str:
    return "–" if math.isnan(stage.efficiency) else number(stage.efficiency, 2)


def _whole_gamma(run: Evaporation) -> str:
    lost = math.log(float(run.atoms[-1] / run.atoms[0]))
    if abs(lost) < 1e-3:
        return "–"
    density = run.rows.classical_phase_space_density
    return number(-math.log(float(density[-1] / density[0])) / lost, 2)
