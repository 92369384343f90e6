"""What every page of plots has: its canvases, the line under them, and what can be done with a plot."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from io import BytesIO
from pathlib import Path
from typing import Any, Literal, get_args

from PySide6.QtCore import QByteArray, QMimeData, Signal
from PySide6.QtGui import QGuiApplication, QImage
from PySide6.QtWidgets import QDialog, QFileDialog, QVBoxLayout, QWidget

from app.engine import CloudAnswer
from app.figures.export_data import write_csv
from app.figures.picture import Picture
from app.figures.theme import LIGHT, Theme
from app.files import write_atomically
from app.newest import Job
from app.plan import Plan
from app.widgets.limits_dialog import LimitsDialog, place_text
from app.widgets.plot import Plot
from app.widgets.plot_bar import PlotBar
from app.window.live_canvas import LiveCanvas

PictureFormat = Literal["png", "svg", "pdf"]


class Page(QWidget):
    """A page shows its part of the answer while it is visible.

    Signals: plan_edited(Plan, what, merge key) when the user changes the plan on a plot; part_wanted() when the part
    on show is no longer the one to show; part_stopped() and part_allowed() when the user does not want a long one to
    be worked out, or wants it after all; told(str) for one sentence to the user; folder_used(Path) after a file was
    saved there; memory_changed() when `memory` gives something else; unit_chosen(name, unit) when the reader picks
    another unit for a quantity; trap_asked(place) when the trap in which a stage of the ramp begins is to be edited.
    """

    plan_edited = Signal(object, str, str)
    part_wanted = Signal()
    part_stopped = Signal()
    part_allowed = Signal()
    told = Signal(str)
    folder_used = Signal(object)
    memory_changed = Signal()
    unit_chosen = Signal(str, str)
    trap_asked = Signal(int)

    title = ""
    needs_cloud = True
    """Whether there is something to show only for a plan whose cloud has an answer."""

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.theme = theme
        self.cloud: CloudAnswer | None = None
        self.folder = Path.home()
        self._plots: list[Plot] = []
        self._active: Plot | None = None
        self.bar = PlotBar()
        self.bar.pressed.connect(self._press)
        self.bar.progress.stopped.connect(self.part_stopped)
        self.bar.progress.allowed.connect(self.part_allowed)
        self.column = QVBoxLayout(self)
        self.column.setContentsMargins(0, 0, 0, 0)
        self.column.setSpacing(0)

    # ---------------------------------------------------------------- for the pages themselves

    def add_plot(self, name: str) -> Plot:
        """A new canvas with its view, not yet in any layout."""
        canvas = LiveCanvas(theme=self.theme)
        canvas.setAccessibleName(name)
        canvas.setToolTip("Wheel zooms, a drag moves, a drag with Shift zooms into a box")
        canvas.setWhatsThis(canvas.toolTip())
        canvas.set_box_zoom(self.bar.buttons["box"].isChecked())
        plot = Plot(canvas)
        self._plots.append(plot)
        return plot

    def remove_plot(self, plot: Plot) -> None:
        self._plots.remove(plot)
        if self._active is plot:
            self._active = None
        plot.canvas.setParent(None)
        plot.canvas.deleteLater()

    def pointer_text(self, plot: Plot, place: tuple[float, float] | None) -> str:
        """What the pointer reads on a plot: both axes, with units; empty off the axes."""
        picture = plot.canvas.picture
        if place is None or picture is None:
            return ""
        axes = zip((picture.x, picture.y), place, strict=True)
        return "   ".join(f"{axis.label} = {place_text(axis, value)}" for axis, value in axes)

    # ---------------------------------------------------------------- for the window

    def part(self, plan: Plan) -> Job | None:
        """The work whose result this page shows, for the worker thread; None if it has all it needs."""
        raise NotImplementedError

    def take_part(self, answer: Any) -> None:
        """Show the result of `part`, or of a job in steps so much of it as there is."""
        raise NotImplementedError

    def show_progress(self, what: str, share: float) -> None:
        """The part is being worked out, and this share of it is done."""
        self.bar.progress.show_share(what, share)

    def show_end(self, *, stopped: bool) -> None:
        """Nothing is being worked out any more: all is there, or the user stopped it."""
        self.bar.progress.end(stopped=stopped)

    def show_cloud(self, cloud: CloudAnswer) -> None:
        """Keep the newest cloud, and show it where the page does."""
        self.cloud = cloud
        for plot in self._plots:
            plot.canvas.set_stale(False)

    def mark_stale(self, reason: str) -> None:
        for plot in self._plots:
            plot.canvas.set_stale(True, f"not current: {reason}")

    def set_theme(self, theme: Theme) -> None:
        self.theme = theme
        for plot in self._plots:
            plot.canvas.set_theme(theme)

    @property
    def problems(self) -> tuple[str, ...]:
        """What cannot be read, as sentences."""
        return ()

    def discard_edits(self) -> None:
        """Drop texts that could not be read: another plan is about to be shown."""

    def memory(self) -> dict[str, tuple[str, ...]]:
        """What the user has made of the page, to be remembered from one session to the next, as texts."""
        return {}

    def recall(self, texts: Mapping[str, Sequence[str]], units: Mapping[str, str]) -> None:
        """Take up what `memory` gave, and the units that quantities are read in; what makes no sense is left out."""

    @property
    def plots(self) -> tuple[Plot, ...]:
        return tuple(self._plots)

    @property
    def active(self) -> Plot:
        """The plot that commands work on: the one that had the keyboard last."""
        focused = next((plot for plot in self._plots if plot.canvas.hasFocus()), None)
        self._active = focused or self._active or self._plots[0]
        return self._active

    def take_focus(self) -> None:
        self.active.canvas.setFocus()

    # ---------------------------------------------------------------- what can be done with a plot

    def _press(self, tool: str, checked: bool) -> None:
        match tool:
            case "zoom_in":
                self.zoom(0.5)
            case "zoom_out":
                self.zoom(2.0)
            case "box":
                for plot in self._plots:
                    plot.canvas.set_box_zoom(checked)
            case "home":
                self.home()
            case "limits":
                self.ask_limits()
            case "copy":
                self.copy_picture()
            case "picture":
                self.save_picture()
            case "data":
                self.save_data()

    def home(self) -> None:
        self.active.home()

    def zoom(self, factor: float) -> None:
        self.active.zoom(factor)

    def pan(self, right: float, up: float) -> None:
        self.active.pan(right, up)

    def ask_limits(self) -> None:
        if not self.active.ready:
            return
        plot = self.active
        dialog = LimitsDialog(plot.picture(), self)
        if dialog.exec() == QDialog.DialogCode.Accepted and dialog.view is not None:
            plot.set_view(dialog.view)
        dialog.deleteLater()

    def pictures(self) -> tuple[Picture, ...]:
        """What the page shows now, as pictures for export."""
        return tuple(plot.picture() for plot in self._plots if plot.ready)

    def copy_picture(self) -> None:
        """The plots on the clipboard, as an image and as SVG; on white, which is what papers want."""
        if not self._has_plots():
            return
        data = QMimeData()
        png, svg = self._drawn("png"), self._drawn("svg")
        data.setImageData(QImage.fromData(png))
        data.setData("image/svg+xml", QByteArray(svg))
        QGuiApplication.clipboard().setMimeData(data)

    def _drawn(self, form: PictureFormat) -> bytes:
        from app.figures.draw import save_pictures

        buffer = BytesIO()
        save_pictures(self.pictures(), buffer, form, theme=LIGHT)
        return buffer.getvalue()

    def _has_plots(self) -> bool:
        """Whether anything is plotted; if not, the user is told."""
        if self.pictures():
            return True
        self.told.emit(f"Nothing is plotted on the page {self.title} that could be copied or saved.")
        return False

    def save_picture(self) -> None:
        if not self._has_plots():
            return
        chosen, _ = QFileDialog.getSaveFileName(
            self, "Save the plot", str(self.folder / f"{self.title.lower()}.png"),
            "Pictures (*.png *.svg *.pdf);;PNG (*.png);;SVG (*.svg);;PDF (*.pdf)",
        )  # fmt: skip
        if chosen:
            self.write_picture(Path(chosen))

    def write_picture(self, path: Path) -> None:
        """Write the plots in the format that the name ends in."""
        ending = path.suffix.lower().lstrip(".")
        form = next((known for known in get_args(PictureFormat) if known == ending), None)
        if form is None:
            self.told.emit(f"{path.name} must end in .png, .svg or .pdf.")
        elif self._has_plots():
            self.write(path, self._drawn(form))

    def save_data(self) -> None:
        if not self._has_plots():
            return
        chosen, _ = QFileDialog.getSaveFileName(
            self, "Save the numbers behind the plot", str(self.folder / f"{self.title.lower()}.csv"), "CSV (*.csv)"
        )
        if chosen:
            path = Path(chosen)
            self.write_data(path if path.suffix else path.with_suffix(".csv"))

    def write_data(self, path: Path) -> None:
        """Write all numbers in full precision, with decimal points, names and units in the first line."""
        self.write(path, self.csv().encode("utf-8"))

    def csv(self) -> str:
        """The numbers behind the plots."""
        return write_csv(self.pictures())

    def write(self, path: Path, content: bytes) -> None:
        """Write a file, or tell why it cannot be written."""
        try:
            write_atomically(path, content)
        except OSError as error:
            self.told.emit(f"{error}.")
        else:
            self.folder = path.parent
            self.folder_used.emit(path.parent)
