"""Speed of surveys: the part that a form shows at once, and all of it with the volume curve. In milliseconds."""

from __future__ import annotations

import time
from collections.abc import Callable, Iterator
from functools import partial

import numpy as np

from physics.cloud import Cloud, Model, equilibrium
from physics.particles import Statistics
from physics.species import load_species
from physics.traps import Coils, GaussianBeam, Trap
from physics.traps.survey import survey

ROUNDS = 9
A = GaussianBeam(name="A", wavelength=1064e-9, power=2.5, waists=70e-6, direction=(1.0, 0.0, 0.0))
B = GaussianBeam(name="B", wavelength=1064e-9, power=1.7, waists=55e-6, direction=(0.0, 1.0, 0.0))
BELOW = GaussianBeam(
    name="C", wavelength=1064e-9, power=2.5, waists=70e-6, direction=(1.0, 0.0, 0.0), focus=(0.0, 0.0, -70e-6)
)
TRAPS = {
    "one beam": Trap(beams=(A,)),
    "crossed beams": Trap(beams=(A, B)),
    "beam under a quadrupole": Trap(beams=(BELOW,), coils=Coils(gradient=0.25)),
    "Ioffe coils with a knife": Trap(
        coils=Coils(bias=1e-4, gradient=1.5, curvature=100.0, axis=(1.0, 0.0, 0.0), knife=2e6)
    ),
}


def median(task: Callable[[], object]) -> float:
    """Median milliseconds."""
    task()
    times = []
    for _ in range(ROUNDS):
        start = time.perf_counter()
        task()
        times.append(time.perf_counter() - start)
    return 1e3 * float(np.median(times))


def condensed(cloud: Cloud, model: Model) -> float:
    """Condensed fraction, worked out anew."""
    return float(equilibrium(cloud, model).condensate_fraction)


def rows() -> Iterator[tuple[str, float, float | None]]:
    """(what, measured, goal)."""
    state = load_species("87Rb").state("F=1 mF=-1")
    for name, trap in TRAPS.items():
        yield f"{name}: minimum, frequencies, depth, sag [ms]", median(lambda trap=trap: survey(trap, state)), None
        yield f"{name}: with its volume curve [ms]", median(lambda trap=trap: survey(trap, state).volume_curve), 400.0
    found = survey(TRAPS["crossed beams"], state)
    curve = found.volume_curve
    assert curve is not None
    energies = curve.ceiling * np.linspace(0.01, 1.0, 500)
    for model in (Model.IDEAL, Model.SEMI_IDEAL, Model.HARTREE_FOCK):
        cloud = Cloud(
            trap=found, statistics=Statistics.BOSE, mass=state.mass, atoms=5e5, temperature=4e-7,
            scattering_length=5.3e-9,
        )  # fmt: skip
        yield f"a condensed cloud in crossed beams, {model.value} [ms]", median(partial(condensed, cloud, model)), 5.0
    yield "density of states at 500 energies [ms]", median(lambda: curve.density_of_states(energies)), 5.0
