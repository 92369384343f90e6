"""Cuts, sections and scans of a plan's trap, against closed forms and surveys of their own."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from app.answers.trap_controls import Control, ControlKind, controls
from app.answers.trap_cuts import trap_cuts
from app.answers.trap_scan import TrapScan, trap_scan
from app.answers.trap_section import planes, trap_section
from app.answers.trap_shape import shape_scale, trap_shape
from app.engine import trap_answer
from app.plan import DEFAULT_PLAN, Plan, plan_with, read_plan
from app.units import Quantity
from physics.constants import boltzmann, planck, standard_gravity

ROOT = Path(__file__).resolve().parents[2]
FALLS = ROOT / "tests" / "data" / "plan_of_a_trap_that_holds_nothing.toml"


def preset(name: str) -> Plan:
    return read_plan(ROOT / "presets" / "traps" / f"{name}.toml")


def with_power(plan: Plan, name: str, watts: float) -> Plan:
    beam = plan.trap.beam(name)
    changed = replace(beam, power=replace(beam.power, text=f"{watts!r} W", value=watts))
    return replace(plan, trap=plan.trap.with_beam(name, changed))


def test_a_harmonic_trap_is_cut_into_parabolas() -> None:
    found = trap_cuts(DEFAULT_PLAN, shape_scale(DEFAULT_PLAN))
    assert found is not None
    shape, cuts = found
    assert [cut.direction.name for cut in cuts] == ["x", "y", "z"]
    mass = shape.answer.survey.mass
    for cut, frequency in zip(cuts, shape.answer.survey.frequencies, strict=True):
        expected = 0.5 * mass * (2.0 * np.pi * frequency * cut.distance) ** 2
        np.testing.assert_allclose(cut.energy, expected, rtol=1e-12)
        np.testing.assert_allclose(cut.harmonic, expected, rtol=1e-12)
        assert cut.frequency == pytest.approx(frequency, rel=1e-12)
        assert cut.escape is None


def test_cuts_of_crossed_beams_start_as_parabolas_and_end_below_them() -> None:
    plan = preset("crossed_beams_rubidium")
    found = trap_cuts(plan, shape_scale(plan))
    assert found is not None
    shape, cuts = found
    assert [cut.direction.upright for cut in cuts] == [False, False, True]
    for cut in cuts:
        near = (np.abs(cut.distance) < 0.01 * cut.direction.reach) & (cut.distance != 0.0)
        # sampled at the surveyed minimum, the energy is that of the frequencies, up to the next order
        np.testing.assert_allclose(cut.energy[near], cut.harmonic[near], rtol=0.03)
        assert np.all(cut.energy > -1e-6 * shape.top) or cut.direction.upright  # only downwards is there less
    upright = cuts[2]
    depth = shape.answer.survey.depth
    assert upright.escape is not None
    assert upright.escape < 0.0
    assert np.interp(upright.escape, upright.distance, upright.energy) == pytest.approx(depth, rel=1e-3)


def test_the_knife_cuts_a_line_where_the_splitting_meets_it() -> None:
    plan = preset("quadrupole_rubidium")
    found = trap_cuts(plan, shape_scale(plan))
    assert found is not None
    _, cuts = found
    # |gF| muB B = h f at B = f h/(muB/2); 160 G/cm along z and half of it across; gF within 3e-4 of 1/2
    field = 18e6 * planck / (0.5 * 9.2740100657e-24)
    for cut, gradient in zip(cuts, (0.8, 0.8, 1.6), strict=True):
        assert sorted(cut.knife) == pytest.approx([-field / gradient, field / gradient], rel=3e-3)
        assert cut.frequency is None
        assert np.all(np.isnan(cut.harmonic))


def test_a_trap_that_holds_nothing_is_still_cut_and_falls_along_gravity() -> None:
    plan = read_plan(FALLS)
    found = trap_cuts(plan, shape_scale(plan))
    assert found is not None
    shape, cuts = found
    assert not shape.answer.trapped
    upright = next(cut for cut in cuts if cut.direction.upright)
    far = np.abs(upright.distance) > 10.0 * upright.direction.reach
    assert np.all(np.diff(upright.energy[far & (upright.distance < 0.0)]) > 0.0)  # the higher, the more energy


def test_a_trap_without_a_potential_has_no_cuts() -> None:
    plan = preset("crossed_beams_dysprosium")
    beams = tuple(replace(beam, wavelength=Quantity("532 nm", 532e-9)) for beam in plan.trap.beams)
    green = replace(plan, trap=replace(plan.trap, beams=beams))  # far from its published polarizability
    assert trap_answer(green).survey.potential is None
    assert trap_cuts(green, shape_scale(green)) is None
    assert trap_section(green, shape_scale(green), "xz") is None


def test_very_deep_traps_are_shown_where_the_atoms_are() -> None:
    plan = plan_with(preset("single_beam_lithium"), {"cloud.temperature": "1 uK"})
    shape = trap_shape(plan, shape_scale(plan))
    assert shape is not None
    assert shape.top == pytest.approx(40e-6 * boltzmann, rel=1e-9)
    assert shape.answer.survey.depth is not None
    assert shape.answer.survey.depth > 5.0 * shape.top


def test_a_section_has_the_potential_of_each_of_its_points() -> None:
    plan = preset("crossed_beams_dysprosium")
    scale = shape_scale(plan)
    shape = trap_shape(plan, scale)
    assert shape is not None
    names = [plane.name for plane in planes(shape)]
    assert names == ["xz", "yz", "xy", "axis 1 and z", "axis 2 and z", "axis 1 and axis 2"]
    for name in names:
        found = trap_section(plan, scale, name)
        assert found is not None
        section = found[1]
        assert section.plane.name == name
        row, column = 17, 92
        away = section.x[column] * section.plane.first.vector + section.y[row] * section.plane.second.vector
        if section.plane.absolute:
            # the coordinate that the plane does not show is that of the minimum
            hidden = np.cross(section.plane.first.vector, section.plane.second.vector)
            point = away + (shape.middle @ hidden) * hidden
        else:
            point = shape.middle + away
        assert section.energy[row, column] == pytest.approx(float(shape.energy(point)), rel=1e-9)
        assert section.minimum is not None


def test_the_way_out_lies_in_the_upright_planes_and_beside_the_level_one() -> None:
    plan = preset("crossed_beams_rubidium")
    aside = {}
    for name in ("xz", "yz", "xy"):
        found = trap_section(plan, shape_scale(plan), name)
        assert found is not None
        aside[name] = found[1].aside
        assert found[1].escape is not None
    assert aside == {"xz": False, "yz": False, "xy": True}


def test_a_part_of_a_section_is_worked_out_for_itself() -> None:
    plan = preset("crossed_beams_rubidium")
    found = trap_section(plan, shape_scale(plan), "xz", (-1e-5, 1e-5, -2e-5, 0.0))
    assert found is not None
    assert (found[1].x[0], found[1].x[-1], found[1].y[0], found[1].y[-1]) == (-1e-5, 1e-5, -2e-5, 0.0)


def test_controls_are_those_that_the_trap_has() -> None:
    crossed, coils = preset("crossed_beams_rubidium"), preset("quadrupole_rubidium")
    assert controls(crossed.trap) == (
        Control(ControlKind.POWERS),
        Control(ControlKind.POWER, "long"),
        Control(ControlKind.POWER, "across"),
        Control(ControlKind.WAIST, "long"),
        Control(ControlKind.WAIST, "across"),
    )
    assert controls(coils.trap) == (Control(ControlKind.GRADIENT), Control(ControlKind.KNIFE))
    assert controls(DEFAULT_PLAN.trap) == ()


def test_a_scan_has_the_survey_of_each_of_its_points() -> None:
    plan = preset("single_beam_lithium")
    control = Control(ControlKind.POWER, "A")
    scan = trap_scan(plan, control, (0.5, 2.0), points=5)
    assert scan is not None
    assert scan.complete
    assert np.all(scan.trapped)
    np.testing.assert_allclose(scan.values, 9.0 * np.array([0.5, 0.5**0.5, 1.0, 2.0**0.5, 2.0]), rtol=1e-12)
    for place in (0, 4):
        alone = trap_answer(with_power(plan, "A", float(scan.values[place]))).survey
        np.testing.assert_allclose(scan.frequencies[place], alone.frequencies, rtol=1e-9)
        assert scan.depth[place] == pytest.approx(alone.depth, rel=1e-9)
        assert scan.sag[place] == pytest.approx(alone.sag, rel=1e-6)
    # w^2 ~ P where gravity hardly counts, and the sag is g/w^2
    np.testing.assert_allclose(scan.frequencies[4] / scan.frequencies[0], 2.0, rtol=1e-3)
    omega = 2.0 * np.pi * scan.frequencies[:, 2]
    np.testing.assert_allclose(scan.sag, standard_gravity / omega**2, rtol=1e-3)


def test_a_scan_hands_out_what_is_there_and_stops_when_told() -> None:
    plan = preset("single_beam_lithium")
    control = Control(ControlKind.POWER, "A")
    parts: list[TrapScan] = []
    shares: list[float] = []
    assert trap_scan(plan, control, (0.5, 2.0), parts.append, lambda share: not shares.append(share), 5) is not None
    assert [int(np.count_nonzero(part.done)) for part in parts] == [1, 2, 3, 4]
    assert list(np.flatnonzero(parts[1].done)) == [0, 4]  # the ends first, then what lies between
    assert shares == [0.0, 0.2, 0.4, 0.6, 0.8]
    assert trap_scan(plan, control, (0.5, 2.0), tick=lambda share: share < 0.3, points=5) is None


def test_a_scan_says_where_nothing_is_held() -> None:
    plan = preset("crossed_beams_rubidium")
    scan = trap_scan(plan, Control(ControlKind.POWERS), (0.2, 1.0), points=5)
    assert scan is not None
    # they hold from 0.396 of their power on
    np.testing.assert_array_equal(scan.trapped, scan.values > 0.396)
    assert np.all(np.isnan(scan.depth[~scan.trapped]))
    assert np.all(np.isfinite(scan.depth[scan.trapped]))


@pytest.mark.parametrize("plan", [DEFAULT_PLAN, preset("crossed_beams_rubidium")], ids=["harmonic", "beams"])
def test_a_control_that_is_not_there_cannot_be_scanned(plan: Plan) -> None:
    with pytest.raises(ValueError, match=r"^this trap has no gradient that could be scanned$"):
        trap_scan(plan, Control(ControlKind.GRADIENT), (0.5, 2.0))
