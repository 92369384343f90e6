"""The pictures of map, slices and profile: what they show, where, and that nothing needs a plotting library."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from app.answers.map import usual_limits
from app.engine import Against, MapLimits, cloud_answer, map_answer, profile_answer, slices_answer
from app.figures.map import SPLIT, map_picture, with_cloud
from app.figures.picture import Axis, Picture, Role
from app.figures.profile import Depth, profile_picture
from app.figures.slices import slice_picture
from app.figures.ticks import axis_title, ticks_of
from app.plan import DEFAULT_PLAN, Plan, plan_with, read_plan

TRAPS = Path(__file__).resolve().parents[3] / "presets" / "traps"
LIMITS = MapLimits(atoms_low=1e3, atoms_high=1e7, temperature_low=1e-8, temperature_high=1e-5)
FERMIONS = plan_with(DEFAULT_PLAN, {"species.key": "40K"})


def the_map(plan: Plan = DEFAULT_PLAN) -> Picture:
    return map_picture(map_answer(plan, LIMITS), cloud_answer(plan))


def curve(picture: Picture, role: Role) -> tuple[np.ndarray, np.ndarray]:
    found = next(c for c in picture.curves if c.role is role)
    return found.x, found.y


# --- map ---


def test_the_threshold_line_is_where_the_colours_part() -> None:
    picture = the_map()
    assert picture.field is not None
    x, y = curve(picture, Role.THRESHOLD)
    column = 50
    below = picture.field.y < y[column]
    shade = picture.field.shade[:, column]
    assert np.all(shade[below] >= SPLIT)
    assert np.all(shade[~below] <= SPLIT)
    assert np.array_equal(x, picture.field.x)


def test_decade_lines_run_where_the_phase_space_density_has_that_value() -> None:
    answer = map_answer(DEFAULT_PLAN, LIMITS)
    picture = map_picture(answer, cloud_answer(DEFAULT_PLAN))
    tenth = next(label for label in picture.labels if label.text == "10⁻³")
    there = cloud_answer(
        plan_with(DEFAULT_PLAN, {"cloud.atoms": f"{tenth.x:.12g}", "cloud.temperature": f"{tenth.y:.12g} K"})
    )
    # Interpolated between grid points 4 % apart in N and 7 % in T, nearly straight in logarithms.
    assert float(there.equilibrium.peak_phase_space_density) == pytest.approx(1e-3, rel=2e-3)


def test_isolines_of_the_condensed_fraction_are_labelled_with_it() -> None:
    picture = the_map()
    half = next(label for label in picture.labels if label.text == "50 %")
    there = cloud_answer(
        plan_with(DEFAULT_PLAN, {"cloud.atoms": f"{half.x:.12g}", "cloud.temperature": f"{half.y:.12g} K"})
    )
    assert float(there.equilibrium.condensate_fraction) == pytest.approx(0.5, abs=0.01)


def test_the_shifted_threshold_of_repulsive_bosons_lies_below_the_ideal_one() -> None:
    picture = the_map()
    _x, ideal = curve(picture, Role.THRESHOLD)
    _x, shifted = curve(picture, Role.THRESHOLD_SHIFTED)
    assert np.all(shifted < ideal)


def test_fermions_have_lines_of_equal_t_over_tf_and_their_own_threshold() -> None:
    picture = the_map(plan_with(FERMIONS, {"target.reduced_temperature": "0.25"}))
    x, y = curve(picture, Role.THRESHOLD)
    there = cloud_answer(plan_with(FERMIONS, {"cloud.atoms": f"{x[30]:.12g}", "cloud.temperature": f"{y[30]:.12g} K"}))
    assert float(there.equilibrium.reduced_temperature) == pytest.approx(0.25, rel=1e-9)
    assert not any(c.role in (Role.THRESHOLD_SHIFTED, Role.FRACTION) for c in picture.curves)
    assert {label.text for label in picture.labels} == {"0.1", "1", "10"}


def test_the_cloud_has_a_draggable_mark_with_its_one_sigma_ellipse() -> None:
    (mark,) = the_map().marks
    assert (mark.x, mark.y, mark.draggable) == (1e5, 2e-7, True)
    assert mark.outline is not None
    # log-normal, one sigma: N exp(+-sigma/N), T exp(+-sigma/T)
    assert np.max(mark.outline.x) == pytest.approx(1e5 * np.exp(0.1))
    assert np.min(mark.outline.y) == pytest.approx(2e-7 * np.exp(-0.05))


def test_moving_the_cloud_changes_its_mark_and_its_way_only() -> None:
    plan = plan_with(DEFAULT_PLAN, {"target.efficiency": "2"})
    ground = the_map(plan)
    moved = with_cloud(ground, cloud_answer(plan_with(plan, {"cloud.atoms": "3e5"})))
    assert moved.field is ground.field
    assert [c.name for c in moved.curves] == [c.name for c in ground.curves]
    assert moved.marks[0].x == 3e5


def test_the_evaporation_of_constant_efficiency_ends_on_the_threshold() -> None:
    plan = plan_with(DEFAULT_PLAN, {"target.efficiency": "2"})
    x, y = curve(the_map(plan), Role.CLOUD)
    end = plan_with(plan, {"cloud.atoms": f"{x[-1]:.12g}", "cloud.temperature": f"{y[-1]:.12g} K"})
    assert float(cloud_answer(end).equilibrium.reduced_temperature) == pytest.approx(1.0, rel=1e-9)
    # gamma = -d ln D/d ln N with D = N (hbar w/kT)^3
    slope = np.diff(np.log(x / y**3)) / np.diff(np.log(x))
    assert slope == pytest.approx(-2.0)


@pytest.mark.parametrize("name", ["crossed_beams_rubidium", "telecom_beams_helium", "single_beam_lithium"])
def test_in_a_real_trap_it_ends_on_the_threshold_of_that_trap(name: str) -> None:
    plan = read_plan(TRAPS / f"{name}.toml")
    x, y = curve(map_picture(map_answer(plan, usual_limits(plan)), cloud_answer(plan)), Role.CLOUD)
    assert (x[0], y[0]) == pytest.approx((plan.cloud.atoms.value, plan.cloud.temperature.value))
    assert np.all(np.diff(np.log(y)) / np.diff(np.log(x)) > 0.3)
    end = cloud_answer(plan_with(plan, {"cloud.atoms": f"{x[-1]:.12g}", "cloud.temperature": f"{y[-1]:.12g} K"}))
    assert float(end.equilibrium.temperature_to_threshold) == pytest.approx(1.0, rel=1e-5)


# --- slices ---


@pytest.mark.parametrize("against", Against)
def test_a_slice_marks_the_cloud_and_the_threshold(against: Against) -> None:
    answer = slices_answer(DEFAULT_PLAN, ("peak_phase_space_density",))
    picture = slice_picture(answer, "peak_phase_space_density", against)
    (mark,) = picture.marks
    now = float(cloud_answer(DEFAULT_PLAN).equilibrium.peak_phase_space_density)
    assert (mark.x, mark.y) == (2e-7 if against is Against.TEMPERATURE else 1e5, now)
    x, _y = curve(picture, Role.THRESHOLD)
    expected = answer.threshold_temperature if against is Against.TEMPERATURE else answer.threshold_atoms
    assert x[0] == x[1] == expected


def test_a_slice_in_another_unit_is_the_same_curve() -> None:
    answer = slices_answer(DEFAULT_PLAN, ("critical_temperature",))
    nano = slice_picture(answer, "critical_temperature", Against.ATOMS, "nK")
    micro = slice_picture(answer, "critical_temperature", Against.ATOMS, "µK")
    assert nano.curves[0].y == pytest.approx(1e3 * micro.curves[0].y)
    assert (nano.y.unit, micro.y.unit) == ("nK", "µK")


def test_a_slice_with_nothing_to_show_says_so() -> None:
    answer = slices_answer(plan_with(DEFAULT_PLAN, {"cloud.temperature": "20 µK"}), ("condensate_radii",))
    picture = slice_picture(answer, "condensate_radii", Against.TEMPERATURE)
    assert picture.note == "no value here"
    assert picture.marks == ()


def test_axes_hold_still_under_small_changes_of_the_cloud() -> None:
    pictures = [
        slice_picture(slices_answer(plan_with(DEFAULT_PLAN, {"cloud.temperature": text}), (name,)), name, Against.ATOMS)
        for text in ("200 nK", "204 nK")
        for name in ("condensate_fraction", "energy_per_atom")
    ]
    assert pictures[0].x == pictures[2].x
    assert [p.y for p in pictures[:2]] == [p.y for p in pictures[2:]]


def test_the_ellipse_of_a_slice_leans_along_its_curve() -> None:
    plan = plan_with(DEFAULT_PLAN, {"cloud.atoms": "1.0(2)e5", "cloud.temperature": "300 nK"})
    answer = slices_answer(plan, ("reduced_temperature",))
    against_n = slice_picture(answer, "reduced_temperature", Against.ATOMS).marks[0]
    assert against_n.outline is not None
    x, y = np.log(against_n.outline.x), np.log(against_n.outline.y)
    # T/Tc ~ N^(-1/3), and only N is uncertain here: the ellipse is the piece of that line within one deviation.
    slope = np.polyfit(x, y, 1)[0]
    assert slope == pytest.approx(-1 / 3, rel=1e-3)
    assert x.max() - np.log(1e5) == pytest.approx(0.198, abs=0.003)  # of ln N, sqrt(ln(1 + 0.2^2))
    against_t = slice_picture(answer, "reduced_temperature", Against.TEMPERATURE).marks[0]
    assert against_t.outline is not None
    assert np.ptp(against_t.outline.x) < 1e-20


# --- profile ---


@pytest.mark.parametrize("shows", Depth)
def test_a_thermal_cloud_shows_its_total_and_the_classical_one(shows: Depth) -> None:
    picture = profile_picture(profile_answer(DEFAULT_PLAN, 2), shows)
    assert [c.role for c in picture.curves] == [Role.TOTAL, Role.CLASSICAL]
    assert max(c.y.max() for c in picture.curves) <= picture.y.high


def test_a_condensed_cloud_shows_its_parts_which_add_up() -> None:
    plan = plan_with(DEFAULT_PLAN, {"cloud.temperature": "70 nK"})
    picture = profile_picture(profile_answer(plan, 0), Depth.DENSITY)
    total, thermal, condensate, _classical = picture.curves
    assert total.y == pytest.approx(thermal.y + condensate.y)
    assert [c.role for c in picture.curves] == [Role.TOTAL, Role.THERMAL, Role.CONDENSATE, Role.CLASSICAL]


def test_the_unit_of_a_density_axis_carries_the_power_of_ten() -> None:
    picture = profile_picture(profile_answer(DEFAULT_PLAN, 0), Depth.DENSITY)
    peak = float(cloud_answer(DEFAULT_PLAN).equilibrium.peak_density)
    assert axis_title(picture.y) == "density n [10¹² cm⁻³]"
    assert ticks_of(picture.y).texts[-1] == "8"
    assert picture.curves[0].y.max() == pytest.approx(peak / 1e6)
    logarithmic = profile_picture(profile_answer(DEFAULT_PLAN, 0), Depth.DENSITY, log=True)
    assert axis_title(logarithmic.y) == "density n [cm⁻³]"


def test_axes_refuse_what_cannot_be_drawn() -> None:
    with pytest.raises(ValueError, match="axis 'T' must run from low to high, got 2 to 1"):
        Axis(label="T", unit="K", low=2.0, high=1.0)
    with pytest.raises(ValueError, match="logarithmic axis 'T' must start above zero, got 0"):
        Axis(label="T", unit="K", low=0.0, high=1.0, log=True)
    with pytest.raises(ValueError, match="axis 'T' must be linear and not prefixed to count in a power of ten"):
        Axis(label="T", unit="K", low=1.0, high=2.0, log=True, power=3)
