"""Steps of ideal fermions in the discrete levels of a trap."""

from __future__ import annotations

import numpy as np

from app.explanations import inputs
from app.explanations.functions import Defined
from app.explanations.scales import spacings
from app.explanations.sheet import Axes, Sheet, once
from app.explanations.terms import Leaf
from physics.fermi_levels import FermiLevels

_LEVELS = "over n_i = 0, 1, 2, ..., with f = 1/{exp[Σ_i b_i (n_i + 1/2) − ln z] + 1}"


def _levels(log_z: float, *spacings: float) -> FermiLevels:
    return FermiLevels(np.array(spacings), float(log_z) + 1.0)


ATOMS = Defined("A", f"A(ln z, b₁, b₂, b₃) = Σ f {_LEVELS}", lambda log_z, *b: _levels(log_z, *b).atoms(float(log_z)))
CENTRE = Defined(
    "B",
    "B(ln z, b₁, b₂, b₃) = Σ f Π_i (2π b_i)^(1/2) p(n_i) over even n_i, p(n) = n!/[2^n ((n/2)!)² √π], with the same f",
    lambda log_z, *b: _levels(log_z, *b).central_density(float(log_z)),
)
ENERGY = Defined(
    "E",
    "E(ln z, b, b′, b″) = Σ b (n + 1/2) f over all n, n′, n″, with the same f",
    lambda log_z, *b: float(_levels(log_z, *b).energies(float(log_z))[0]),
)


@once
def log_fugacity(sheet: Sheet) -> Leaf:
    unknown, N, b = Leaf("ln z", sheet.number("log_fugacity")), inputs.atoms(sheet), spacings(sheet)
    meaning = "log of the fugacity z, µ/kT from the trap bottom, at which the levels hold N atoms"
    return sheet.solve(unknown, meaning, ATOMS(unknown, *b), N, where=ATOMS.definition)


@once
def peak_phase_space_density(sheet: Sheet) -> Leaf:
    formula, meaning = CENTRE(log_fugacity(sheet), *spacings(sheet)), "n λ³ at the centre"
    value = sheet.number("peak_phase_space_density")
    return sheet.step("D", meaning, formula, value=value, where=CENTRE.definition)


@once
def energies(sheet: Sheet) -> Axes:
    """Energy of all atoms along each axis, over kT."""
    ln_z, (b1, b2, b3) = log_fugacity(sheet), spacings(sheet)
    meaning = "energy of all atoms along axis"
    first, second, third = (
        sheet.step(f"E{'₁₂₃'[axis]}", f"{meaning} {axis + 1}, over kT", ENERGY(ln_z, *own), where=ENERGY.definition)
        for axis, own in enumerate(((b1, b2, b3), (b2, b3, b1), (b3, b1, b2)))
    )
    return first, second, third
