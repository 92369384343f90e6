"""Which class answers for a model in a real trap."""

from __future__ import annotations

from physics.equilibria import Equilibrium
from physics.models import Model
from physics.particles import Statistics
from physics.real_hartree_fock import RealHartreeFock
from physics.real_ideal import RealIdealBose, RealIdealFermi
from physics.real_semi_ideal import RealSemiIdeal

_BOSONS: dict[Model, type[Equilibrium]] = {
    Model.IDEAL: RealIdealBose,
    Model.SEMI_IDEAL: RealSemiIdeal,
    Model.HARTREE_FOCK: RealHartreeFock,
}


def real_model(statistics: Statistics, model: Model) -> type[Equilibrium]:
    """The class of a model; exact levels have none."""
    return RealIdealFermi if statistics is Statistics.FERMI else _BOSONS[model]
