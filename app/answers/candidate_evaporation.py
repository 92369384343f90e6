"""The best evaporation of candidates: how many atoms it leaves at the target, and how long it takes.

Each takes from a second to many, so that several are worked out at once, each on a process of its own.
"""

from __future__ import annotations

import math
import os
from collections.abc import Callable, Hashable, Sequence
from dataclasses import dataclass, replace
from functools import partial
from queue import Empty, Queue
from threading import Thread
from typing import TYPE_CHECKING

from app.language import translate as _
from app.process import OwnProcess, ProcessLost, Stopped
from app.words import number

if TYPE_CHECKING:
    from app.answers.candidate_row import CandidateRow
    from app.plan import Plan
    from app.process import Tick

GLANCE = 0.05
"""Seconds between looks at whether the results are still wanted."""


@dataclass(frozen=True, kw_only=True)
class EvaporationResult:
    """What is left at the target.

    atoms : per spin state; NaN where the target is not reached
    time : [s]; NaN where it is not reached
    reason : why it is not, as a clause; empty where it is
    assumed : what stands for a target that the plan does not name; empty where it does
    """

    atoms: float = math.nan
    time: float = math.nan
    reason: str = ""
    assumed: str = ""


def best_evaporation(plan: Plan, tick: Tick | None = None) -> EvaporationResult:
    """The evaporation that leaves most of the plan's atoms at its target, within its limits; its ramp does not count.

    `tick` is told the share that is done; where it says to stop, `physics.evaporation.Cancelled` is raised.
    """
    from app.answers.ramp_design import design_answer

    try:
        found = design_answer(replace(plan, ramp=(), measured=()), tick=tick)
    except (ValueError, ArithmeticError) as error:
        return EvaporationResult(reason=str(error))
    assumed = ""
    if found.assumed:
        target = found.target
        assumed = (
            _("a peak phase-space density of {target} stands for the target").format(
                target=f"{target.peak_phase_space_density:.4g}"
            )
            if target.peak_phase_space_density is not None
            else _("T/TF = {target} stands for the target").format(target=f"{target.reduced_temperature:.3g}")
        )
    final = found.answer.run.final
    if not found.answer.reached:
        short = _("the best ramp ends short of the target, at a peak phase-space density of {density}")
        return EvaporationResult(
            reason=short.format(density=number(final["peak_phase_space_density"], 2)), assumed=assumed
        )
    return EvaporationResult(atoms=final["atoms"], time=final["time"], assumed=assumed)


def evaporation_key(plan: Plan) -> Hashable:
    """What the best evaporation of a candidate depends on."""
    return plan.species, plan.trap, plan.cloud, plan.losses, plan.target, plan.limits


def hopeless(row: CandidateRow) -> str:
    """Why no evaporation of a candidate can be worked out, where that is known without trying; else empty."""
    from app.answers.candidate_row import Failure

    if row.failure in (None, Failure.ATTRACTIVE):
        return ""
    return row.reason


def evaporate_rows(
    rows: Sequence[CandidateRow],
    found: Callable[[int, EvaporationResult], bool] = lambda _place, _result: True,
    told: Callable[[float], bool] = lambda _share: True,
) -> tuple[CandidateRow, ...] | None:
    """The rows with the best evaporation of each, worked out on all cores.

    `found` is given place and result of each as it comes, `told` again and again the share that is done; a false answer
    of either stops the work, and the result is None.
    """
    results: dict[int, EvaporationResult] = {}
    for place, row in enumerate(rows):
        why = hopeless(row)
        if why:
            results[place] = EvaporationResult(reason=why)
            if not found(place, results[place]):
                return None
    jobs = [(place, row.plan) for place, row in enumerate(rows) if place not in results]
    with _Crew(jobs) as crew:
        while len(results) < len(rows):
            done = crew.result()
            if done is not None:
                results[done[0]] = done[1]
                if not found(*done):
                    return None
            if not told((len(results) + crew.under_way) / len(rows)):
                return None
    return tuple(replace(row, evaporation=results[place]) for place, row in enumerate(rows))


class _Crew:
    """Threads that each have a process of their own, and take one job after the other until there is none, or until
    they are left."""

    def __init__(self, jobs: Sequence[tuple[int, Plan]]) -> None:
        self._jobs: Queue[tuple[int, Plan]] = Queue()
        for job in jobs:
            self._jobs.put(job)
        self._done: Queue[tuple[int, EvaporationResult] | Exception] = Queue()
        self._shares: dict[int, float] = {}
        self._left = False
        count = min(len(jobs), os.cpu_count() or 1)
        self._threads = [Thread(target=self._work, name=f"coldward-crew-{k}", daemon=True) for k in range(count)]

    def __enter__(self) -> _Crew:
        for thread in self._threads:
            thread.start()
        return self

    def __exit__(self, *_error: object) -> None:
        self._left = True
        for thread in self._threads:
            thread.join()

    @property
    def under_way(self) -> float:
        """Shares done of the jobs that are not done yet, added up."""
        return math.fsum(list(self._shares.values()))

    def result(self) -> tuple[int, EvaporationResult] | None:
        """The next result; None where none has come for a little while."""
        try:
            done = self._done.get(timeout=GLANCE)
        except Empty:
            return None
        if isinstance(done, Exception):
            raise done
        return done

    def _work(self) -> None:
        try:
            with OwnProcess() as process:
                self._work_through(process)
        except Stopped:
            return
        except Exception as error:  # whatever it is, it belongs to the one who asked, and not to a thread that dies
            self._done.put(error)

    def _work_through(self, process: OwnProcess) -> None:
        while not self._left:
            try:
                place, plan = self._jobs.get_nowait()
            except Empty:
                return
            try:
                result = process.run(best_evaporation, (plan,), partial(self._tick, place))
            except ProcessLost as error:
                result = EvaporationResult(reason=str(error))
            self._shares.pop(place, None)
            self._done.put((place, result))

    def _tick(self, place: int, share: float) -> bool:
        self._shares[place] = share
        return not self._left
