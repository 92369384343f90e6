"""What about a trap deserves a word: an id and the number that raised it, SI. The sentences are written elsewhere.

Reference
---------
[1] M. Lax, W. H. Louisell, W. B. McKnight, Phys. Rev. A 11, 1365 (1975). Recalled.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from enum import Enum

import numpy as np

from physics.constants import bohr_magneton, planck
from physics.light import PolarizabilitySource
from physics.traps.boundary import Exit
from physics.traps.escape import Basin
from physics.traps.landscape import Landscape
from physics.traps.potential import Potential

ZEEMAN_SHOWN = 5e6
"""[Hz] muB B/h or radio frequency from which the linear Zeeman effect is mentioned: 2 % of the least hyperfine
splitting of an alkali atom, 228 MHz of 6Li."""


TIGHT = 2.0
"""Waist over wavelength below which the formulas of a Gaussian beam are off by more than about 2 %: they are the first
term in powers of (wavelength/(pi waist))^2 [1]."""


class NoteKind(Enum):
    """What is said of a trap; in [brackets] the number that comes with it."""

    BLUE_LIGHT = "light of a beam repels the atoms [relative detuning from the nearest line]"
    NEAR_RESONANCE = "light of a beam is close to a line [relative detuning]"
    PUBLISHED_POLARIZABILITY = "a polarizability is that published for a nearby wavelength [relative distance]"
    TIGHT_FOCUS = "a beam is focused so tightly that it is no Gaussian beam any more [waist over wavelength]"
    INFINITE_ARMS = "the volume curve ends below the depth, where the volume is infinite [share of the depth]"
    WALL = "nothing but the wall limits the trap [distance of the wall, m]"
    ARM_END = "the way out leads to the end of a beam's arm, as far as it is followed [energy, J]"
    FIELD_ZERO = "the field vanishes at the minimum, where atoms lose their state [force, N]"
    LINEAR_ZEEMAN = "the Zeeman effect is taken as linear [muB B/h or the radio frequency, Hz]"
    KNIFE_IDLE = "the radio-frequency knife does nothing to this state [frequency, Hz]"


@dataclass(frozen=True, kw_only=True)
class Note:
    """One note; `beam` where it is about one."""

    kind: NoteKind
    value: float
    beam: str = ""


def notes_of(landscape: Landscape, basin: Basin | None, ceiling: float | None) -> tuple[Note, ...]:
    """The notes on a trap. `ceiling`: share of the depth at which the volume curve ends, None if at the depth."""
    return tuple(_notes(landscape, basin, ceiling))


def _notes(landscape: Landscape, basin: Basin | None, ceiling: float | None) -> Iterator[Note]:
    potential = landscape.potential
    yield from _light_notes(potential)
    coils = potential.coils
    if coils is not None and coils.knife is not None and potential.knife_energy is None:
        yield Note(kind=NoteKind.KNIFE_IDLE, value=coils.knife)
    if basin is None:
        return
    if ceiling is not None:
        yield Note(kind=NoteKind.INFINITE_ARMS, value=ceiling)
    if basin.escape.kind is Exit.WALL:
        yield Note(kind=NoteKind.WALL, value=landscape.wall)
    if basin.escape.kind is Exit.ARM_END:
        yield Note(kind=NoteKind.ARM_END, value=basin.depth)
    if basin.minimum.cusp:
        yield Note(kind=NoteKind.FIELD_ZERO, value=float(np.max(np.linalg.svd(basin.minimum.curvature)[1])))
    if potential.zeeman_slope != 0.0 and coils is not None and not potential.stretched:
        places = [basin.minimum.position] + ([] if basin.escape.position is None else [basin.escape.position])
        field = float(np.max(potential.magnetic_field(np.array(places))))
        frequency = max(bohr_magneton * field / planck, coils.knife or 0.0)
        if frequency > ZEEMAN_SHOWN:
            yield Note(kind=NoteKind.LINEAR_ZEEMAN, value=frequency)


def _light_notes(potential: Potential) -> Iterator[Note]:
    for name, light in potential.lights.items():
        if light.blue:
            yield Note(kind=NoteKind.BLUE_LIGHT, value=light.detuning if light.detuning is not None else 0.0, beam=name)
        if light.near_resonance and light.detuning is not None:
            yield Note(kind=NoteKind.NEAR_RESONANCE, value=light.detuning, beam=name)
        if light.source is PolarizabilitySource.PUBLISHED and light.distance is not None:
            yield Note(kind=NoteKind.PUBLISHED_POLARIZABILITY, value=light.distance, beam=name)
    for beam in potential.beams:
        waist = float(np.min(beam.waists)) / beam.wavelength
        if waist < TIGHT:
            yield Note(kind=NoteKind.TIGHT_FOCUS, value=waist, beam=beam.name)
