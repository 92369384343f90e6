"""From a plan to its answers: what depends on what, and that the answers agree with one another."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from app.answers.uncertainty import MODEL_FREE
from app.engine import (
    SAMPLES,
    MapLimits,
    Method,
    cloud_answer,
    draft_map,
    map_answer,
    map_with_progress,
    profile_answer,
    round_up,
    slices_answer,
    usual_limits,
)
from app.plan import DEFAULT_PLAN, plan_with
from app.quantities import QUANTITIES, Need
from physics.models import Model

LIMITS = MapLimits(atoms_low=1e3, atoms_high=1e7, temperature_low=1e-8, temperature_high=1e-5)


def test_an_answer_is_kept_while_what_it_depends_on_stays() -> None:
    hotter = plan_with(DEFAULT_PLAN, {"cloud.temperature": "300 nK"})
    assert cloud_answer(DEFAULT_PLAN) is cloud_answer(replace(DEFAULT_PLAN, title="another title"))
    assert cloud_answer(hotter) is not cloud_answer(DEFAULT_PLAN)


def test_moving_the_cloud_leaves_the_map_alone_and_changing_the_trap_does_not() -> None:
    moved = plan_with(DEFAULT_PLAN, {"cloud.temperature": "300 nK", "cloud.atoms": "3e5"})
    tighter = plan_with(DEFAULT_PLAN, {"trap.frequencies": "150 Hz, 150 Hz, 20 Hz"})
    assert map_answer(DEFAULT_PLAN, LIMITS) is map_answer(moved, LIMITS)
    assert map_answer(DEFAULT_PLAN, LIMITS) is not map_answer(tighter, LIMITS)


@pytest.mark.parametrize("key", ["87Rb", "6Li", "23Na", "40K"])
def test_the_map_says_at_each_point_what_the_cloud_says_there(key: str) -> None:
    plan = plan_with(DEFAULT_PLAN, {"species.key": key, "cloud.atoms": "2e5", "cloud.temperature": "150 nK"})
    limits = MapLimits(atoms_low=2e5, atoms_high=4e5, temperature_low=1.5e-7, temperature_high=3e-7)
    answer = map_answer(plan, limits, 5)
    solved = cloud_answer(plan).equilibrium
    assert answer.peak_phase_space_density[0, 0] == pytest.approx(float(solved.peak_phase_space_density), rel=1e-12)
    assert answer.reduced_temperature[0, 0] == pytest.approx(float(solved.reduced_temperature), rel=1e-12)
    assert answer.bosons == (key in ("87Rb", "23Na"))


@pytest.mark.parametrize("model", ["ideal", "semi-ideal", "exact levels"])
def test_slices_pass_through_the_cloud(model: str) -> None:
    plan = plan_with(DEFAULT_PLAN, {"cloud.model": model})
    names = ("peak_phase_space_density", "energy_per_atom", "thermal_radii")
    answer = slices_answer(plan, names)
    for values, now in zip(answer.values_temperature, answer.now, strict=True):
        here = np.interp(np.log(answer.temperature), np.log(answer.temperature_grid), np.log(values))
        assert np.exp(here) == pytest.approx(now, rel=2e-3)
    for values, now in zip(answer.values_atoms, answer.now, strict=True):
        here = np.interp(np.log(answer.atoms), np.log(answer.atoms_grid), np.log(values))
        assert np.exp(here) == pytest.approx(now, rel=2e-3)


@pytest.mark.parametrize("key", ["87Rb", "40K"])
@pytest.mark.parametrize("axis", [0, 1, 2])
@pytest.mark.parametrize("temperature", ["200 nK", "60 nK"])
def test_profiles_hold_all_the_atoms(key: str, axis: int, temperature: str) -> None:
    # In units of the frequencies a cloud in a harmonic trap is a sphere, so that one profile gives the number:
    # N = 4 pi (w^2/(w' w'')) int x^2 n dx from the centre out, and 2 pi (w/w') int x n_column dx for the column.
    plan = plan_with(DEFAULT_PLAN, {"species.key": key, "cloud.temperature": temperature, "cloud.atoms": "1e5"})
    answer = profile_answer(plan, axis)
    frequencies = [quantity.value for quantity in plan.trap.frequencies]
    half = slice(answer.positions.size // 2, None)
    x = answer.positions[half]
    along, sight = frequencies[axis], frequencies[answer.line_of_sight]
    other = frequencies[3 - axis - answer.line_of_sight]
    volume = 4 * np.pi * along**2 / (sight * other)
    assert volume * np.trapezoid(x**2 * answer.density.total[half], x) == pytest.approx(1e5, rel=4e-3)
    assert 2 * np.pi * along / other * np.trapezoid(x * answer.column.total[half], x) == pytest.approx(1e5, rel=4e-3)


def test_the_usual_limits_hold_the_cloud_and_its_threshold_with_room() -> None:
    for text in ("1 nK", "200 nK", "3 mK"):
        plan = plan_with(DEFAULT_PLAN, {"cloud.temperature": text})
        limits, answer = usual_limits(plan), cloud_answer(plan)
        threshold = plan.cloud.temperature.value * float(answer.equilibrium.temperature_to_threshold)
        for temperature in (plan.cloud.temperature.value, threshold):
            assert limits.temperature_low * 5 < temperature < limits.temperature_high / 5
        assert limits.holds(plan.cloud.atoms.value, plan.cloud.temperature.value)


def test_limits_that_are_no_range_are_refused() -> None:
    with pytest.raises(
        ValueError, match=r"temperature of the map must run from a low to a high positive limit, got 1 to 0\.1"
    ):
        replace(LIMITS, temperature_low=1.0, temperature_high=0.1)


# --- uncertainty ---


def test_without_uncertainties_there_is_no_interval() -> None:
    plan = plan_with(
        DEFAULT_PLAN, {"cloud.atoms": "1e5", "cloud.temperature": "200 nK", "trap.frequencies": "120 Hz, 120 Hz, 20 Hz"}
    )
    answer = cloud_answer(plan)
    assert not answer.uncertainty.any
    assert answer.spread("reduced_temperature") is None
    assert answer.probability_beyond_threshold is None


def test_intervals_follow_linear_error_propagation_where_errors_are_small() -> None:
    # T/Tc ~ T N^(-1/3) (f1 f2 f3)^(-1/3): relative errors add in quadrature with these exponents.
    plan = plan_with(
        DEFAULT_PLAN,
        {
            "cloud.atoms": "1.00(2)e5",
            "cloud.temperature": "200(3) nK",
            "trap.frequencies": "120(1) Hz, 120(1) Hz, 20.0(2) Hz",
        },
    )
    answer = cloud_answer(plan)
    spread = answer.spread("reduced_temperature")
    assert spread is not None
    centre = float(answer.equilibrium.reduced_temperature)
    parts = np.array([3 / 200, 0.02 / 3, 1 / 360, 1 / 360, 0.01 / 3])
    expected = centre * np.sqrt(np.sum(parts**2)) * 0.994457883  # 84 % is 0.9945 standard deviations
    assert (float(spread.high) - float(spread.low)) / 2 == pytest.approx(expected, rel=5e-3)


def test_the_chance_of_being_condensed_is_one_half_at_the_threshold() -> None:
    at = float(cloud_answer(DEFAULT_PLAN).equilibrium.critical_temperature)
    answer = cloud_answer(plan_with(DEFAULT_PLAN, {"cloud.temperature": f"{at * 1e9:.6f}(5000000) nK"}))
    assert answer.probability_beyond_threshold == pytest.approx(0.5, abs=2.5 / np.sqrt(SAMPLES))


# --- what is missing ---


def test_what_a_cloud_lacks_is_named() -> None:
    bosons = cloud_answer(plan_with(DEFAULT_PLAN, {"trap.depth": "", "target.efficiency": ""}))
    assert bosons.missing(QUANTITIES["fermi_energy"]) is Need.FERMIONS
    assert bosons.missing(QUANTITIES["truncation"]) is Need.DEPTH
    assert bosons.missing(QUANTITIES["atoms_left_at_target"]) is Need.EFFICIENCY
    assert bosons.missing(QUANTITIES["condensate_radii"]) is Need.INTERACTING_CONDENSATE
    assert bosons.missing(QUANTITIES["condensate_fraction"]) is None
    fermions = cloud_answer(plan_with(DEFAULT_PLAN, {"species.key": "6Li"}))
    assert fermions.missing(QUANTITIES["critical_temperature"]) is Need.BOSONS
    assert fermions.missing(QUANTITIES["elastic_collision_rate"]) is Need.COLLISIONS


def test_a_model_that_cannot_hold_gives_way_and_says_so() -> None:
    answer = cloud_answer(plan_with(DEFAULT_PLAN, {"species.scattering_length": "-20 a0", "cloud.model": "semi-ideal"}))
    assert answer.model is Model.IDEAL
    assert "model_not_repulsive" in {caveat.id for caveat in answer.caveats}


def test_axis_ends_are_round_and_not_below_the_value() -> None:
    for value in np.geomspace(1e-7, 3e4, 400):
        end = round_up(float(value))
        assert value <= end * (1 + 1e-12)
        assert end <= 2.0 * value


# --- uncertainty beyond sampling ---


@pytest.mark.parametrize("model", ["Hartree-Fock", "exact levels"])
def test_models_that_are_not_sampled_are_spread_by_derivatives(model: str) -> None:
    plan = plan_with(
        DEFAULT_PLAN, {"cloud.model": model, "cloud.atoms": "1.00(2)e5", "cloud.temperature": "90.0(5) nK"}
    )
    answer = cloud_answer(plan)
    sampled = answer.spread("reduced_temperature")
    assert sampled is not None
    assert sampled.method is Method.DRAWS  # T/Tc0 does not depend on the model
    spread = answer.spread("condensate_fraction")
    assert spread is not None
    assert spread.method is Method.FIRST_ORDER
    # by hand: the fraction one standard deviation up and down in each input, added in quadrature
    pieces = []
    for name, low, high in (("cloud.atoms", 1e5 / 1.0202, 1e5 * 1.0202), ("cloud.temperature", 89.5013, 90.5014)):
        unit = "" if name == "cloud.atoms" else " nK"
        ends = [
            float(cloud_answer(plan_with(plan, {name: f"{end:.8g}{unit}"})).equilibrium.condensate_fraction)
            for end in (low, high)
        ]
        pieces.append(0.5 * (ends[1] - ends[0]))
    assert (float(spread.high) - float(spread.low)) / 2 == pytest.approx(0.99446 * np.hypot(*pieces), rel=2e-3)


def test_first_order_and_sampling_agree_where_errors_are_small() -> None:
    texts = {"cloud.atoms": "1.000(5)e5", "cloud.temperature": "80.0(2) nK"}
    sampled = cloud_answer(plan_with(DEFAULT_PLAN, texts)).spread("condensate_fraction")
    linear = cloud_answer(plan_with(DEFAULT_PLAN, {**texts, "cloud.model": "Hartree-Fock"})).spread(
        "condensate_fraction"
    )
    assert sampled is not None
    assert linear is not None
    # another model, so another slope: alike to 15 percent
    widths = [float(spread.high) - float(spread.low) for spread in (sampled, linear)]
    assert widths[1] == pytest.approx(widths[0], rel=0.15)


def test_an_uncertain_field_spreads_the_scattering_length() -> None:
    plan = plan_with(
        DEFAULT_PLAN,
        {"species.key": "85Rb", "species.field": "163.0(2) G", "cloud.atoms": "1e5", "cloud.temperature": "200 nK"},
    )
    spread = cloud_answer(plan).spread("elastic_collision_rate")
    assert spread is not None
    # a = abg (1 - Delta/(B - B0)) with abg = -443 a0, B0 = 155.041 G, Delta = 10.71 G (presets); rate ~ a^2 nearly
    ends = [-443 * (1 - 10.71 / (field - 155.041)) for field in (163.0 - 0.2, 163.0 + 0.2)]
    ratio = float(spread.high) / float(spread.low)
    assert ratio == pytest.approx((ends[0] / ends[1]) ** 2, rel=0.02)


def test_every_quantity_that_is_said_not_to_depend_on_the_model_does_not() -> None:
    answers = [
        cloud_answer(
            plan_with(DEFAULT_PLAN, {"cloud.model": model, "cloud.temperature": "90 nK", "trap.depth": "1 uK"})
        )
        for model in ("ideal", "semi-ideal", "exact levels", "Hartree-Fock")
    ]
    for name in MODEL_FREE:
        values = [np.asarray(answer.value(name)) for answer in answers]
        for value in values[1:]:
            np.testing.assert_array_equal(value, values[0], err_msg=name)


# --- the condensate by itself, and thresholds beyond the ideal one ---


def test_a_weakly_interacting_condensate_has_the_width_of_the_ground_level() -> None:
    plan = plan_with(
        DEFAULT_PLAN,
        {
            "cloud.temperature": "10 nK",
            "cloud.atoms": "1e4",
            "species.scattering_length": "0.001 a0",
            "cloud.model": "ideal",
        },
    )
    radii = np.asarray(cloud_answer(plan).value("condensate_rms_radii"))
    # sqrt(hbar/(2 m w)) of 87Rb at 120 Hz and 20 Hz, by hand
    np.testing.assert_allclose(radii, [6.961e-7, 6.961e-7, 1.7051e-6], rtol=2e-3)


def test_the_exact_threshold_stands_beside_the_shifted_one() -> None:
    # 1e5 atoms at 120:120:20 Hz. First order: 0.7275 (86.67/66.04) 1e5^(-1/3) = 2.06 %; exact levels a little more.
    answer = cloud_answer(DEFAULT_PLAN)
    ratio = float(answer.value("critical_temperature_exact_levels")) / float(answer.value("critical_temperature"))
    assert 1.0 - ratio == pytest.approx(0.0206, rel=0.06)


@pytest.mark.parametrize(
    ("texts", "name", "value"),
    [
        # 0.575 aho/|a|: aho = 3.797 um for 7Li at 100 Hz, |a| = 20 a0 = 1.0584 nm
        ({"species.key": "7Li", "species.scattering_length": "-20 a0"}, "collapse_atoms", 2062.0),
        # 130.8 a0 of 164Dy (mu0 mu^2 m/(12 pi hbar^2) at 9.93 muB) over 100 a0
        ({"species.key": "164Dy", "species.scattering_length": "100 a0"}, "dipolar_ratio", 1.308),
    ],
)
def test_limits_of_condensates(texts: dict[str, str], name: str, value: float) -> None:
    plan = plan_with(
        DEFAULT_PLAN, {**texts, "trap.frequencies": "100 Hz, 100 Hz, 100 Hz", "cloud.temperature": "20 nK"}
    )
    assert float(cloud_answer(plan).value(name)) == pytest.approx(value, rel=5e-3)


# --- maps of slow models, and what scatters together ---


@pytest.mark.parametrize("name", ["exact levels", "Hartree-Fock"])
def test_the_map_of_a_slow_model_says_what_the_cloud_says_there(name: str) -> None:
    plan = plan_with(DEFAULT_PLAN, {"cloud.atoms": "2e5", "cloud.temperature": "150 nK", "cloud.model": name})
    limits = MapLimits(atoms_low=2e5, atoms_high=4e5, temperature_low=1.5e-7, temperature_high=3e-7)
    shares: list[float] = []

    def tick(share: float) -> bool:
        shares.append(share)
        return True

    answer = map_with_progress(plan, limits, tick)
    assert answer is not None
    solved = cloud_answer(plan).equilibrium
    assert answer.complete
    assert answer.peak_phase_space_density[0, 0] == pytest.approx(float(solved.peak_phase_space_density), rel=1e-9)
    assert answer.condensate_fraction[0, 0] == pytest.approx(float(solved.condensate_fraction), rel=1e-6)
    assert shares == sorted(shares)
    assert shares[-1] == 1.0
    assert map_with_progress(plan, limits, lambda _share: False) is None
    draft = draft_map(plan, limits)
    assert not draft.complete
    # The lines of the draft are those of the map, so that nothing around it moves when it arrives.
    np.testing.assert_allclose(draft.threshold_of_model[[0, -1]], answer.threshold_of_model[[0, -1]], rtol=1e-9)


def test_an_input_and_what_follows_from_it_scatter_together() -> None:
    # D ~ N T^-3 (f1 f2 f3) of a classical cloud: ln D scatters by the sum in quadrature, and by its share with N.
    plan = plan_with(
        DEFAULT_PLAN,
        {
            "cloud.atoms": "1.00(5)e5",
            "cloud.temperature": "2.00(4) µK",
            "trap.frequencies": "120 Hz, 120 Hz, 20.0(4) Hz",
        },
    )
    atoms, temperature, trap = 0.05, 3 * 0.02, 0.02
    whole = np.sqrt(atoms**2 + temperature**2 + trap**2)
    for model in ("ideal", "exact levels"):
        uncertainty = cloud_answer(plan_with(plan, {"cloud.model": model})).uncertainty
        along_n = uncertainty.joint("classical_phase_space_density", "atoms")
        along_t = uncertainty.joint("classical_phase_space_density", "temperature")
        assert along_n is not None
        assert along_t is not None
        assert along_n.input_deviation == pytest.approx(atoms, rel=0.02)
        assert along_n.log_deviation == pytest.approx(whole, rel=0.02)
        assert along_n.correlation == pytest.approx(atoms / whole, abs=0.03)
        assert along_t.correlation == pytest.approx(-temperature / whole, abs=0.03)


def test_what_is_certain_scatters_with_nothing() -> None:
    certain = plan_with(
        DEFAULT_PLAN, {"cloud.atoms": "1e5", "cloud.temperature": "200 nK", "trap.frequencies": "120 Hz, 120 Hz, 20 Hz"}
    )
    assert cloud_answer(certain).uncertainty.joint("peak_density", "atoms") is None
    warm = plan_with(certain, {"cloud.temperature": "200(10) nK"})
    joint = cloud_answer(warm).uncertainty.joint("critical_temperature", "temperature")
    assert joint is not None
    assert joint.correlation == 0.0
    assert joint.log_deviation < 1e-12
