"""A page with plots along a ramp, on which all values are read at one time: under the pointer, or moved by keys."""

from __future__ import annotations

from PySide6.QtCore import QEvent, QObject

from app.widgets.page import Page
from app.widgets.plot import Plot
from app.widgets.ramp_plots import ColumnPlots
from app.widgets.time_keys import moved_time


class TimePage(Page):
    """Attributes: reading, the time that is read [s] or None."""

    reading: float | None = None

    # ---------------------------------------------------------------- for the pages themselves

    @property
    def along(self) -> ColumnPlots:
        """The plots along the ramp."""
        raise NotImplementedError

    @property
    def end(self) -> float | None:
        """End of what is shown. [s] None where there is no ramp."""
        raise NotImplementedError

    def show_reading(self) -> None:
        """Show the values at the time that is read now."""
        raise NotImplementedError

    # ---------------------------------------------------------------- reading values

    def read_time(self, time: float | None) -> None:
        """Read all values at a time; None: at none."""
        if time != self.reading:
            self.reading = time
            self.show_reading()

    def add_plot(self, name: str) -> Plot:
        plot = super().add_plot(name)
        plot.canvas.installEventFilter(self)
        return plot

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        """Left and right arrow keys on a plot along the ramp move the time that is read; Escape ends that."""
        if event.type() != QEvent.Type.KeyPress:
            return super().eventFilter(watched, event)
        on_plot = any(plot.canvas is watched for plot in self.along.plots.values())
        moved = moved_time(event, self.reading, self.end, on_plot=on_plot)
        if moved is None:
            return super().eventFilter(watched, event)
        self.read_time(moved.time)
        return True
