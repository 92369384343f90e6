"""Charts and what is reached on them."""

from __future__ import annotations

import math

import numpy as np
import pytest

from physics.species import State
from physics.traps import Coils, GaussianBeam, Trap
from physics.traps.charts import Stretch
from physics.traps.landscape import Landscape, widened
from physics.traps.potential import potential_of
from physics.traps.survey import survey


def landscape(trap: Trap, state: State) -> Landscape:
    return Landscape(potential=potential_of(trap, state), wall=0.02)


def test_cells_are_small_at_the_places_and_grow_away_from_them() -> None:
    stretch = Stretch.around(-0.1, 0.3, [(0.0, 1e-5), (0.01, 1e-4)], 0.25)
    assert np.sum(stretch.sizes) == pytest.approx(0.4)
    for place, scale in ((0.0, 1e-5), (0.01, 1e-4), (0.2, 0.2)):
        cell = int(np.argmin(np.abs(stretch.middles - place)))
        assert 0.1 * scale < stretch.sizes[cell] < 0.4 * scale
    assert stretch.cells < 150
    assert stretch.of(stretch.at(np.array([0.1, 0.5, 0.9]))) == pytest.approx([0.1, 0.5, 0.9])
    assert stretch.of(np.array([-0.2, 0.31])) == pytest.approx([-1.0, 2.0])


def test_every_cell_finds_its_own_middle(crossed: Trap, rubidium: State) -> None:
    for chart in landscape(crossed, rubidium).charts:
        index, inside = chart.cells_of(chart.cell_points)
        assert np.all(inside)
        assert np.array_equal(index.ravel(), np.arange(index.size))


def test_cells_fill_a_widening_tube(single: Trap, rubidium: State) -> None:
    (chart,) = landscape(single, rubidium).charts
    zR, reach = float(chart.rayleigh_lengths[0]), float(chart.stretches[2].position[-1])
    # The square tube is 7 local radii wide.
    expected = 49.0 * 70e-6**2 * 2.0 * (reach + reach**3 / (3.0 * zR**2))
    assert np.sum(chart.cell_volumes) == pytest.approx(expected, rel=0.03)


def test_tangents_are_the_derivatives_of_the_map(single: Trap, rubidium: State) -> None:
    (chart,) = landscape(single, rubidium).charts
    x = np.array([[0.3, -0.8, 5e-3], [1.0, 2.0, -2e-2]])
    for k, step in enumerate((1e-6, 1e-6, 1e-8)):
        e = step * np.eye(3)[k]
        slope = (chart.points(x + e) - chart.points(x - e)) / (2.0 * step)
        assert chart.tangents(x)[:, k] == pytest.approx(slope, rel=1e-6, abs=1e-12)


def test_a_region_is_reached_across_charts_and_stops_at_the_barrier(crossed: Trap, rubidium: State) -> None:
    found = survey(crossed, rubidium)
    ground = landscape(crossed, rubidium)
    assert found.energy_at_minimum is not None
    assert found.depth is not None
    low = ground.reach(found.minimum, found.energy_at_minimum + 0.7 * found.depth)
    assert not low.leaks
    assert all(np.any(mask) for mask in low.masks)
    # Both arms of both beams are filled by then.
    for chart, mask in zip(ground.charts, low.masks, strict=True):
        along = chart.stretches[2].centres[np.any(mask, axis=(0, 1))]
        assert along.min() < -2e-3
        assert along.max() > 2e-3
    high = ground.reach(found.minimum, found.energy_at_minimum + 1.05 * found.depth)
    assert high.leaks


def test_a_far_start_reaches_nothing_else(single: Trap, rubidium: State) -> None:
    ground = landscape(single, rubidium)
    reach = ground.reach(np.array([0.0, 0.0, 1e-4]), -1.0)
    assert sum(int(np.count_nonzero(mask)) for mask in reach.masks) == 1
    assert int(np.count_nonzero(widened(reach.masks)[0])) == 27


def test_parallel_and_distant_beams_and_coils_have_charts_too(rubidium: State) -> None:
    def beam(name: str, y: float, z: float) -> GaussianBeam:
        return GaussianBeam(
            name=name, wavelength=1064e-9, power=1.0, waists=40e-6, direction=(1, 0, 0), focus=(1e-3, y, z)
        )

    trap = Trap(beams=(beam("A", 0.0, 0.0), beam("B", 0.0, 5e-5), beam("C", 1e-2, 0.0)), coils=Coils(gradient=0.2))
    charts = landscape(trap, rubidium).charts
    assert len(charts) == 4
    assert charts[-1].beam is None
    # With coils nothing is followed further than the wall.
    assert all(np.max(np.abs(chart.stretches[2].position)) < 0.05 for chart in charts)
    assert math.isinf(charts[-1].rayleigh_lengths[0])


def test_a_survey_that_forgets_how_it_was_found_says_the_same(crossed: Trap, rubidium: State) -> None:
    kept, forgetful = survey(crossed, rubidium), survey(crossed, rubidium)
    forgetful.forget()
    assert forgetful.landscape is not None
    assert "charts" not in vars(forgetful.landscape)
    assert kept.volume_curve is not None
    assert forgetful.volume_curve is not None
    np.testing.assert_array_equal(forgetful.volume_curve.volumes, kept.volume_curve.volumes)
