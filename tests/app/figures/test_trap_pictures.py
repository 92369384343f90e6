"""Pictures of a trap: its cuts with the energies of a cloud, its section, its scan."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from app.answers.trap_controls import Control, ControlKind
from app.answers.trap_cuts import trap_cuts
from app.answers.trap_scan import TrapScan, trap_scan
from app.answers.trap_section import trap_section
from app.answers.trap_shape import shape_scale
from app.figures.export_data import write_csv
from app.figures.picture import Picture, Role
from app.figures.trap_cuts import CloudLevels, cut_picture
from app.figures.trap_scan import scan_pictures
from app.figures.trap_section import section_picture
from app.plan import DEFAULT_PLAN, Plan, read_plan
from physics.constants import boltzmann

ROOT = Path(__file__).resolve().parents[3]
FALLS = ROOT / "tests" / "data" / "plan_of_a_trap_that_holds_nothing.toml"


def preset(name: str) -> Plan:
    return read_plan(ROOT / "presets" / "traps" / f"{name}.toml")


def cuts(plan: Plan, levels: CloudLevels) -> list[Picture]:
    found = trap_cuts(plan, shape_scale(plan))
    assert found is not None
    return [cut_picture(found[0], cut, levels) for cut in found[1]]


def section(plan: Plan, name: str, levels: CloudLevels) -> Picture:
    found = trap_section(plan, shape_scale(plan), name)
    assert found is not None
    return section_picture(*found, levels)


def texts(picture: Picture) -> list[str]:
    return [label.text for label in picture.labels]


def test_a_cut_marks_depth_cloud_condensate_and_way_out() -> None:
    levels = CloudLevels(thermal=boltzmann * 0.62e-6, filled=boltzmann * 0.3e-6)
    along_x, _, upright = cuts(preset("crossed_beams_rubidium"), levels)
    assert texts(along_x) == ["depth 6.78 µK", "kT 620 nK", "µ 300 nK", "harmonic"]
    assert texts(upright)[-2:] == ["way out", "harmonic"]
    assert (upright.title, upright.note) == ("along z and gravity", "157.6 Hz · sag 9.38 µm")
    assert upright.marks[0].x < 0.0
    assert upright.marks[0].y == pytest.approx(6.78, rel=2e-3)
    # the line of kT ends where the potential is kT
    line = next(curve for curve in along_x.curves if curve.role is Role.THERMAL)
    potential = next(curve for curve in along_x.curves if curve.role is Role.FIRST)
    np.testing.assert_allclose(np.interp(line.x, potential.x, potential.y), 0.62, rtol=2e-2)
    assert (along_x.x.unit, along_x.y.unit) == ("µm", "µK")


def test_a_level_that_lies_on_the_bottom_or_over_the_top_is_left_out() -> None:
    plan = preset("crossed_beams_rubidium")
    assert "kT 10.0 nK" not in texts(cuts(plan, CloudLevels(thermal=boltzmann * 1e-8))[0])
    assert "kT 20.0 µK" not in texts(cuts(plan, CloudLevels(thermal=boltzmann * 2e-5))[0])


def test_a_harmonic_trap_is_its_own_harmonic_curve() -> None:
    picture = cuts(DEFAULT_PLAN, CloudLevels(thermal=boltzmann * 2e-7))[0]
    assert all(curve.role is not Role.CLASSICAL for curve in picture.curves)
    assert "harmonic" not in texts(picture)


def test_a_trap_that_holds_nothing_shows_the_slope_on_which_atoms_fall() -> None:
    upright = cuts(read_plan(FALLS), CloudLevels(thermal=boltzmann * 1e-6))[3]
    potential = next(curve for curve in upright.curves if curve.role is Role.FIRST)
    seen = potential.y[np.abs(potential.x) < upright.x.high]
    assert np.all((seen > upright.y.low) & (seen < upright.y.high))
    assert upright.x.label == "height over the middle"
    assert texts(upright) == []


def test_the_section_draws_the_cloud_around_the_minimum_only() -> None:
    picture = section(preset("crossed_beams_rubidium"), "xz", CloudLevels(thermal=boltzmann * 0.62e-6))
    assert texts(picture)[0] == "U = kT"
    assert {"way out", "depth 6.78 µK", "2", "4", "6"} <= set(texts(picture))
    cloud = next(curve for curve in picture.curves if curve.role is Role.CLOUD)
    # below the pass the potential falls to kT once more, where no cloud is
    assert np.nanmin(cloud.y) > -30.0
    # rms radius of the harmonic cloud times sqrt(2): where U = kT
    assert np.nanmax(cloud.x) == pytest.approx(np.sqrt(2.0) * 13.07, rel=0.05)
    minimum = picture.marks[0]
    assert (minimum.x, minimum.y) == (pytest.approx(0.0, abs=1e-6), pytest.approx(-9.38, rel=1e-2))
    assert picture.field is not None
    assert float(np.nanmin(picture.field.shade)) < 0.01


def test_a_section_without_the_way_out_says_so() -> None:
    picture = section(preset("crossed_beams_rubidium"), "xy", CloudLevels(thermal=boltzmann * 0.62e-6))
    assert picture.note == "the way out lies beside this plane"
    assert "way out" not in texts(picture)
    far = section(preset("single_beam_lithium"), "xz", CloudLevels(thermal=boltzmann * 3.4e-5))
    assert far.note == "the way out lies further out"


def test_a_section_of_what_is_not_held_has_all_its_energies_on_the_scale() -> None:
    picture = section(read_plan(FALLS), "yz", CloudLevels(thermal=boltzmann * 1e-6))
    assert picture.field is not None
    assert (np.min(picture.field.shade), np.max(picture.field.shade)) == (0.0, 1.0)
    assert picture.marks == ()
    assert picture.title.endswith("through the middle")
    assert {"-20", "0", "20"} <= {text for _, text in picture.field.ticks}


def test_what_the_knife_takes_away_is_left_white() -> None:
    picture = section(preset("quadrupole_rubidium"), "xz", CloudLevels(thermal=boltzmann * 8.5e-5))
    assert "knife" in texts(picture)
    assert picture.field is not None
    assert np.isnan(picture.field.shade[0, 0])
    assert np.isfinite(picture.field.shade[70, 70])


@pytest.fixture(scope="module")
def scan() -> TrapScan:
    plan = preset("crossed_beams_rubidium")
    found = trap_scan(plan, Control(ControlKind.POWERS), (0.2, 1.25), points=9)
    assert found is not None
    return found


def test_a_scan_breaks_its_lines_where_nothing_is_held(scan: TrapScan) -> None:
    frequencies, depth, sag = scan_pictures(scan)
    assert [picture.y.unit for picture in (frequencies, depth, sag)] == ["Hz", "µK", "µm"]
    assert "not trapped" in texts(depth)
    label = next(label for label in depth.labels if label.text == "not trapped")
    assert 0.2 < label.x < 0.396
    assert np.all(np.isnan(depth.curves[0].y[depth.curves[0].x < 0.396]))
    assert frequencies.x.label == "factor on all powers"
    assert "factor on all powers" in write_csv((depth,))
    assert "depth U/k [µK]" in write_csv((depth,))


def test_frequencies_far_apart_are_scanned_by_decades(scan: TrapScan) -> None:
    # A focused beam is a hundred times stiffer across than along.
    found = trap_scan(preset("single_beam_lithium"), Control(ControlKind.POWER, "A"), (0.5, 2.0), points=3)
    assert found is not None
    frequencies, depth, sag = scan_pictures(found)
    assert (frequencies.y.log, frequencies.y.low, frequencies.y.high) == (True, 10.0, 1e4)
    now = next(label for label in frequencies.labels if label.text == "now")
    assert 3e3 < now.y < 1e4
    assert not depth.y.log
    assert (sag.y.unit, sag.y.low) == ("nm", 0.0)
    assert not scan_pictures(scan)[0].y.log


def test_a_scan_that_has_just_begun_is_drawn() -> None:
    parts: list[TrapScan] = []
    plan = preset("single_beam_lithium")
    trap_scan(plan, Control(ControlKind.POWER, "A"), (0.5, 2.0), parts.append, lambda share: share < 0.5, points=5)
    for picture in scan_pictures(parts[0]):
        assert len(picture.curves[0].x) == 1
        assert picture.summary
