"""A hand that moves a place of a ramp on the plot of its controls: every plan is made of the one before the drag."""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from app.figures.ramp_controls import Handle
    from app.plan import Plan


class StageDrag:
    """One drag after the other; `merge_key` is the same for all steps of one."""

    def __init__(self) -> None:
        self._before: Plan | None = None
        self._reach = 1.0  # [s] of the time axis then
        self._count = 0

    @property
    def under_way(self) -> bool:
        return self._before is not None

    @property
    def merge_key(self) -> str:
        return f"ramp drag {self._count}"

    def moved(self, plan: Plan, handle: Handle, time: float, value: float, reach: float) -> Plan | None:
        """The plan with the handle at this place; None where no ramp can go: the handle stays at the last place where
        one can.

        plan : on show; reach : of its time axis [s]
        """
        from app.ramp_drags import with_place_dragged

        if self._before is None:
            self._before, self._reach = plan, reach
        if handle.stage >= min(len(plan.ramp), len(self._before.ramp)):
            return None
        try:
            return with_place_dragged(
                plan, self._before, handle.stage, handle.control, start=handle.start, time=time, value=value,
                end=self._reach,
            )  # fmt: skip
        except ValueError:
            return None

    def end(self) -> None:
        self._count += 1
        self._before = None
