"""A live canvas with a memory of what part of the plot the user wants to see.

A picture comes with limits of its own. Zooming, panning and typed limits override them until "whole plot" is asked
for; live updates keep the override.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

from PySide6.QtCore import QObject, Signal

from app.figures.picture import Picture
from app.window.live_canvas import LiveCanvas
from app.window.views import View, kept_within, moved, view_of, zoomed

Source = Callable[[], Picture]


def in_view(picture: Picture, view: View) -> Picture:
    """The picture with other limits. Raises ValueError for limits that its axes cannot have."""
    return replace(
        picture, x=replace(picture.x, low=view[0], high=view[1]), y=replace(picture.y, low=view[2], high=view[3])
    )


class Plot(QObject):
    """One canvas and the view of it. view_changed() is sent when the user wants to see another part."""

    view_changed = Signal()

    def __init__(self, canvas: LiveCanvas) -> None:
        super().__init__(canvas)
        self.canvas = canvas
        self.view: View | None = None
        self.bounds: View | None = None  # beyond which there is nothing to see
        self._source: Source | None = None
        canvas.view_requested.connect(self.set_view)
        canvas.home_requested.connect(self.home)

    def show(self, source: Source) -> None:
        """Show what this source gives, at the next paint."""
        self._source = source
        self.canvas.show_picture(self.picture)

    def clear(self) -> None:
        """There is nothing to show."""
        self._source = None

    def picture(self) -> Picture:
        """The newest picture, in the present view."""
        if self._source is None:
            raise RuntimeError("a plot was asked for a picture before it had a source")
        picture = self._source()
        if self.view is None:
            return picture
        try:
            return in_view(picture, self.view)
        except ValueError:  # limits of a linear axis that has turned logarithmic since they were wished for
            self.view = None
            return picture

    @property
    def ready(self) -> bool:
        """Whether there is a picture to work with."""
        return self._source is not None

    def set_view(self, view: View | None) -> None:
        """Show this part; None shows the whole. Limits that the axes cannot have are passed over."""
        if view is not None and self._source is not None:
            picture = self._source()
            try:
                in_view(picture, view)
            except ValueError:
                return
            if self.bounds is not None:
                view = kept_within(picture, view, self.bounds)
        if view == self.view:
            return
        self.view = view
        if self._source is not None:
            self.canvas.show_picture(self.picture)
        self.view_changed.emit()

    def home(self) -> None:
        self.set_view(None)

    def zoom(self, factor: float) -> None:
        """Show `factor` times the range, about the middle."""
        if self._source is not None:
            picture = self.picture()
            self._try(zoomed(picture, view_of(picture), factor, 0.5, 0.5))

    def pan(self, right: float, up: float) -> None:
        """Move the range by shares of its length."""
        if self._source is not None:
            picture = self.picture()
            self._try(moved(picture, view_of(picture), right, up))

    def _try(self, view: View | None) -> None:
        if view is not None:
            self.set_view(view)
