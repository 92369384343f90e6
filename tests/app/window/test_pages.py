"""Pages: views that stay, exact limits, pictures and numbers in files."""

import csv
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from PySide6.QtCore import QLocale
from PySide6.QtGui import QGuiApplication
from PySide6.QtTest import QTest

from app.figures.picture import Axis, Picture
from app.kinds import ATOM_NUMBER, TEMPERATURE
from app.quantities import QUANTITIES
from app.units import read_quantity
from app.widgets.form import plan_with_entry
from app.widgets.limits_dialog import LimitsDialog
from app.window.main_window import MainWindow

Settle = Callable[[MainWindow], None]


def limits(window: MainWindow) -> tuple[float, float, float, float]:
    picture = window.desk.page.active.picture()
    return picture.x.low, picture.x.high, picture.y.low, picture.y.high


def set_temperature(window: MainWindow, text: str) -> None:
    plan = window.document.plan
    window.document.edit(plan_with_entry(plan, "cloud.temperature", read_quantity(text, TEMPERATURE)), "temperature")


@pytest.mark.parametrize("number", [0, 1, 2])
def test_zoom_stays_through_live_changes_and_whole_plot_ends_it(
    window: MainWindow, settle: Settle, number: int
) -> None:
    window.desk.show_page(number)
    settle(window)
    whole = limits(window)
    window.actions_by_id["plot.zoom_in"].trigger()
    settle(window)
    near = limits(window)
    assert near[0] > whole[0]
    assert near[1] < whole[1]
    set_temperature(window, "205 nK")
    settle(window)
    assert limits(window) == near
    window.actions_by_id["plot.home"].trigger()
    settle(window)
    assert limits(window)[:2] == pytest.approx(whole[:2])


def test_a_view_that_a_logarithmic_axis_cannot_have_gives_way(window: MainWindow, settle: Settle) -> None:
    window.desk.show_page(2)
    settle(window)
    window.actions_by_id["plot.down"].trigger()
    settle(window)
    assert limits(window)[2] < 0.0
    window.desk.profile.log.click()
    settle(window)
    assert window.desk.page.active.canvas.picture.y.log
    assert limits(window)[2] > 0.0
    assert window.banner.text == ""


def test_the_map_ends_where_no_cloud_can_be(window: MainWindow, settle: Settle) -> None:
    for _ in range(8):
        window.actions_by_id["plot.zoom_out"].trigger()
        settle(window)
    assert limits(window) == (ATOM_NUMBER.low, ATOM_NUMBER.high, TEMPERATURE.low, TEMPERATURE.high)
    for name in ("plot.left", "plot.up", "plot.right", "plot.down"):
        window.actions_by_id[name].trigger()
        settle(window)
        assert limits(window) == (ATOM_NUMBER.low, ATOM_NUMBER.high, TEMPERATURE.low, TEMPERATURE.high)
    plot = window.desk.map.plot
    plot.set_view((1e14, 1e16, 1e-8, 1e-6))
    settle(window)
    assert limits(window) == pytest.approx((1e13, 1e15, 1e-8, 1e-6))
    assert window.banner.text == ""


def test_density_turns_logarithmic_and_linear_again(window: MainWindow, settle: Settle) -> None:
    window.desk.show_page(2)
    settle(window)
    linear = limits(window)
    for log in (True, False, True):
        window.desk.profile.log.click()
        settle(window)
        assert window.desk.page.active.canvas.picture.y.log is log
    window.desk.profile.log.click()
    settle(window)
    assert limits(window) == linear
    assert window.banner.text == ""


def test_panning_moves_by_a_share_of_the_range(window: MainWindow, settle: Settle) -> None:
    before = np.log10(limits(window))
    window.actions_by_id["plot.right"].trigger()
    settle(window)
    after = np.log10(limits(window))
    width = before[1] - before[0]
    np.testing.assert_allclose(after[:2] - before[:2], 0.2 * width, rtol=1e-9)
    np.testing.assert_allclose(after[2:], before[2:])


def test_the_map_is_computed_for_the_limits_asked_for(window: MainWindow, settle: Settle) -> None:
    page = window.desk.map
    page.plot.set_view((1e4, 1e6, 5e-8, 5e-7))
    settle(window)
    assert page._ground is not None
    assert page._ground.answer.atoms[0] == pytest.approx(1e4)
    assert page._ground.answer.temperature[-1] == pytest.approx(5e-7)


def test_limits_are_typed_with_units_and_wrong_ones_are_told(window: MainWindow) -> None:
    dialog = LimitsDialog(window.desk.map.plot.picture())
    low_n, _high_n, low_t, high_t = dialog.fields
    assert [field.text() for field in dialog.fields] == ["1000", "1e7", "10 nK", "10 µK"]
    low_t.setText("20 nK")
    high_t.setText("4 uK")
    assert dialog.view is not None
    assert dialog.view[2:] == (2e-8, 4e-6)
    assert dialog.ok.isEnabled()
    high_t.setText("4")
    assert dialog.view is None
    assert not dialog.ok.isEnabled()
    assert "needs a unit" in dialog.problem.text()
    high_t.setText("1 nK")
    assert "must run from a low to a high limit" in dialog.problem.text()
    low_n.setText("-5")
    assert dialog.view is None
    dialog.deleteLater()


EVERY_UNIT = sorted({unit for row in QUANTITIES.values() for unit in row.units} | {"", "cm^-3", "cm^-2", "mm", "a0"})


@pytest.mark.parametrize("unit", EVERY_UNIT)
def test_limits_are_those_of_the_axis_in_every_unit(window: MainWindow, unit: str) -> None:
    axis = Axis(label="something", unit=unit, low=0.02, high=37.5)
    dialog = LimitsDialog(Picture(title="", x=axis, y=axis))
    assert dialog.problem.text() == ""
    assert dialog.view == (0.02, 37.5, 0.02, 37.5)
    assert all(len(field.text()) <= 5 + len(f" {unit}") for field in dialog.fields)
    dialog.fields[0].setText("1.5" if unit in ("", "1", "%") else f"1.5 {unit}")
    assert dialog.view is not None
    assert dialog.view[0] == 1.5
    dialog.deleteLater()


def test_limits_follow_the_decimal_comma(window: MainWindow) -> None:
    axis = Axis(label="place", unit="µm", low=-1.5, high=2.5)
    before = QLocale()
    QLocale.setDefault(QLocale("de_DE"))
    try:
        dialog = LimitsDialog(Picture(title="", x=axis, y=axis))
    finally:
        QLocale.setDefault(before)
    assert dialog.fields[0].text() == "-1,5 µm"
    dialog.fields[1].setText("3,25 µm")
    assert dialog.view is not None
    assert dialog.view[1] == 3.25
    dialog.deleteLater()


@pytest.mark.parametrize("number", [0, 1, 2])
def test_every_plot_reads_its_pointer_and_offers_its_limits(window: MainWindow, settle: Settle, number: int) -> None:
    window.desk.show_page(number)
    settle(window)
    page = window.desk.page
    for plot in page.plots:
        picture = plot.picture()
        place = (picture.x.high, picture.y.high)
        plot.canvas.pointer_moved.emit(place)
        assert page.bar.status.text
        assert picture.x.label in page.pointer_text(plot, place)
        dialog = LimitsDialog(picture)
        assert dialog.view == pytest.approx((picture.x.low, picture.x.high, picture.y.low, picture.y.high), rel=1e-3)
        dialog.deleteLater()
    assert window.banner.text == ""


def test_the_pointer_reads_units_as_they_are_printed(window: MainWindow, settle: Settle) -> None:
    window.desk.show_page(2)
    settle(window)
    plot = window.desk.page.plots[0]
    assert window.desk.page.pointer_text(plot, (7.1, 5.2e12)) == "position x = 7.10 µm   density n = 5.20e12 cm⁻³"
    window.desk.show_page(1)
    settle(window)
    plot = window.desk.page.plots[2]
    assert window.desk.page.pointer_text(plot, (2e-7, 43.0)) == "temperature T = 200 nK   condensed fraction = 43.0 %"


def test_limits_out_of_every_range_leave_the_view_as_it_was(window: MainWindow) -> None:
    plot = window.desk.map.plot
    plot.set_view((5.0, 1.0, 1e-8, 1e-6))
    assert plot.view is None


@pytest.mark.parametrize(
    ("number", "ending", "opening"), [(0, "png", b"\x89PNG"), (1, "svg", b"<?xml"), (2, "pdf", b"%PDF")]
)
def test_pictures_are_saved_by_their_ending(
    window: MainWindow, settle: Settle, tmp_path: Path, number: int, ending: str, opening: bytes
) -> None:
    window.desk.show_page(number)
    settle(window)
    path = tmp_path / f"plot.{ending}"
    window.desk.page.write_picture(path)
    assert path.read_bytes().startswith(opening)
    assert window.settings.last_folder == tmp_path


def test_an_unknown_ending_and_a_missing_folder_are_told(window: MainWindow, tmp_path: Path) -> None:
    window.desk.page.write_picture(tmp_path / "plot.bmp")
    assert "must end in .png, .svg or .pdf" in window.banner.text
    window.desk.page.write_picture(tmp_path / "none" / "plot.png")
    assert "none" in window.banner.text
    assert "could not be written" in window.banner.text or "cannot write" in window.banner.text


def test_numbers_of_the_map_reread_equal_the_answer(window: MainWindow, tmp_path: Path) -> None:
    page = window.desk.map
    page.write_data(tmp_path / "map.csv")
    with (tmp_path / "map.csv").open(encoding="utf-8", newline="") as stream:
        rows = list(csv.DictReader(stream))
    assert page._ground is not None
    answer = page._ground.answer
    read = np.array([float(row["peak_phase_space_density"]) for row in rows])
    np.testing.assert_array_equal(read, np.ravel(answer.peak_phase_space_density))


@pytest.mark.parametrize("number", [1, 2])
def test_numbers_of_curves_are_saved_in_full_precision(
    window: MainWindow, settle: Settle, tmp_path: Path, number: int
) -> None:
    window.desk.show_page(number)
    settle(window)
    window.desk.page.write_data(tmp_path / "curves.csv")
    text = (tmp_path / "curves.csv").read_text(encoding="utf-8")
    curve = window.desk.page.pictures()[0].curves[0]
    assert repr(float(curve.x[7])) in text
    assert repr(float(curve.y[7])) in text


def test_copying_a_plot_puts_image_and_svg_on_the_clipboard(window: MainWindow) -> None:
    window.desk.map.copy_picture()
    data = QGuiApplication.clipboard().mimeData()
    assert data.hasImage()
    assert bytes(data.data("image/svg+xml").data()).startswith(b"<?xml")


def test_the_axis_of_the_profile_is_chosen_by_keyboard(window: MainWindow, settle: Settle) -> None:
    from PySide6.QtCore import Qt

    page = window.desk.profile
    window.desk.show_page(2)
    settle(window)
    button = page.choice.button(0)
    button.setFocus()
    QTest.keyClick(button, Qt.Key.Key_Right)
    QTest.keyClick(page.choice.button(1), Qt.Key.Key_Right)
    settle(window)
    assert page.choice.checkedId() == 2
    assert "along z" in page.plots[0].picture().title


def test_slices_show_what_is_chosen_and_remember_it(make_window, settle: Settle) -> None:
    window = make_window()
    window.desk.show_page(1)
    settle(window)
    page = window.desk.slices
    assert [picture.title.split(" at ")[0] for picture in page.pictures()[::2]] == [
        "peak phase-space density",
        "condensed fraction",
    ]
    page.choose(("elastic_collision_rate", "peak_density", "condensate_fraction"))
    settle(window)
    assert len(page.plots) == 6
    assert "elastic collision rate" in page.pictures()[0].title
    window.close()
    again = make_window()
    assert again.desk.slices.chosen == ("elastic_collision_rate", "peak_density", "condensate_fraction")


def test_slices_of_fermions_leave_the_condensate_out(window: MainWindow, settle: Settle) -> None:
    page = window.desk.slices
    window.desk.show_page(1)
    page.choose(("condensate_fraction",))
    window.document.edit(plan_with_entry(window.document.plan, "species.key", "6Li"), "species")
    settle(window)
    assert page.chosen == ("peak_phase_space_density", "reduced_temperature")
    assert len(page.pictures()) == 4
    page._fill_menu()
    texts = [action.text() for action in page.menu.actions()]
    assert "Fermi temperature" in texts
    assert "condensed fraction" not in texts


def test_a_change_of_species_with_the_map_in_front_shows_a_map_of_that_species(
    window: MainWindow, settle: Settle
) -> None:
    window.document.edit(plan_with_entry(window.document.plan, "species.key", "40K"), "species")
    settle(window)
    picture = window.desk.map.plot.canvas.picture
    assert picture is not None
    assert picture.field is not None
    assert picture.field.bar_label == "T/TF"


def test_a_cloud_that_leaves_the_map_takes_the_map_along(window: MainWindow, settle: Settle) -> None:
    set_temperature(window, "5 mK")
    settle(window)
    assert limits(window)[3] > 5e-3
    assert replace(window.document.plan) == window.document.plan
