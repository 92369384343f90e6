"""Which share of a trap the light makes."""

from __future__ import annotations

import numpy as np

from physics.species import State
from physics.traps import Coils, Trap
from physics.traps.heating import light_shares
from physics.traps.survey import survey


def test_the_light_makes_all_of_a_trap_of_beams_and_none_of_one_of_coils(single: Trap, rubidium: State) -> None:
    coils = Coils(axis=[1.0, 0.0, 0.0], bias=2e-4, gradient=1.5, curvature=100.0)
    for trap, share in ((single, 1.0), (Trap(coils=coils), 0.0)):
        found = survey(trap, rubidium)
        assert found.potential is not None
        np.testing.assert_allclose(light_shares(found.potential, found.minimum, found.axes), share, atol=1e-12)
    # Springs add: with both, the light's is its share of the sum.
    found = survey(Trap(beams=single.beams, coils=coils, gravity=None), rubidium)
    alone = survey(Trap(beams=single.beams, gravity=None), rubidium)
    assert found.potential is not None
    shares = light_shares(found.potential, found.minimum, found.axes)
    np.testing.assert_allclose(shares, (alone.frequencies / found.frequencies) ** 2, rtol=1e-6)
