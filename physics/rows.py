"""A large array of clouds answered row by row, so that progress can be told and the work be stopped.

For models that take more than a moment: exact levels and Hartree-Fock. The answer is that of one call for the whole
array.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from typing import Any

import numpy as np

from physics.checks import Floats
from physics.cloud import Cloud, equilibrium
from physics.models import Model
from physics.real_trap import RealTrap
from physics.traps import HarmonicTrap

CELLS_AT_ONCE = 512
"""Clouds between two ticks, or one row where that holds more."""


def answer_rows(
    cloud: Cloud,
    model: Model | None,
    names: Sequence[str],
    tick: Callable[[float], bool] | None = None,
    *,
    fermi_threshold: float = 0.5,
    efficiency: float | None = None,
) -> tuple[Floats, ...] | None:
    """Quantities of an array of clouds, a few rows of its first axis at a time.

    Parameters
    ----------
    cloud : Cloud of at least one dimension.
    model, fermi_threshold, efficiency : as for `physics.cloud.equilibrium`.
    names : quantities of `Equilibrium`, by attribute name.
    tick : called with the share of the rows that is done, in (0, 1]; a false answer stops the work. None works through.

    Returns
    -------
    One array for each name, in the full shape of the cloud, radii with one more axis of three; None if stopped.

    Raises
    ------
    ValueError : for a single cloud.
    """
    if not cloud.shape:
        raise ValueError("rows are of an array of clouds, got a single cloud")
    rows = cloud.shape[0]
    per_row = max(1, int(np.prod(cloud.shape[1:])))
    step = max(1, CELLS_AT_ONCE // per_row)
    parts: list[list[Floats]] = [[] for _ in names]
    for start in range(0, rows, step):
        part = slice(start, min(start + step, rows))
        shape = (part.stop - part.start, *cloud.shape[1:])
        solved = equilibrium(_some_rows(cloud, part), model, fermi_threshold=fermi_threshold, efficiency=efficiency)
        for pieces, name in zip(parts, names, strict=True):
            value = np.asarray(getattr(solved, name))
            pieces.append(np.broadcast_to(value, (*shape, 3) if name.endswith("radii") else shape))
        if tick is not None and not tick(part.stop / rows):
            return None
    return tuple(np.concatenate(pieces) for pieces in parts)


def _some_rows(cloud: Cloud, part: slice) -> Cloud:
    """The clouds of some rows; a value that is the same for all rows stays as it is."""
    dimensions = len(cloud.shape)

    def cut(value: Any, inner: int = 0) -> Any:
        has_rows = np.ndim(value) == dimensions + inner and np.shape(value)[0] > 1
        return value[part] if has_rows else value

    found, whole = cut(cloud.trap.frequencies, 1), cloud.trap
    trap: HarmonicTrap | RealTrap
    if isinstance(whole, HarmonicTrap):
        trap = HarmonicTrap(frequencies=found, depth=cut(whole.depth))
    else:
        numbers = {name: cut(getattr(whole, name)) for name in ("held", "volume", "depth")}
        trap = whole.with_numbers(frequencies=found, **numbers)
    return replace(
        cloud,
        trap=trap,
        atoms=cut(cloud.atoms),
        temperature=cut(cloud.temperature),
        scattering_length=cut(cloud.scattering_length),
    )
