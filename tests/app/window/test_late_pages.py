"""Pages are built when they first come to the front, and are then as if they had always been there."""

from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest

from app.figures.theme import DARK
from app.plan import DEFAULT_PLAN, plan_with
from app.window.desk import PAGES
from app.window.settings import ThemeChoice

TITLES = tuple(PAGES)


def test_a_window_begins_with_its_first_page_alone(window) -> None:
    assert [page.title for page in window.desk.built_pages] == ["Map"]
    assert [window.desk.tabs.tabText(place) for place in range(window.desk.tabs.count())][: len(TITLES)] == [*TITLES]


@pytest.mark.parametrize("place", range(1, len(TITLES)))
def test_a_page_is_built_once_and_stands_under_its_tab(lasting_window, load_plan, place: int) -> None:
    desk = load_plan().desk
    desk.show_page(place)
    page = desk.page_in_front
    assert page is not None
    assert page.title == TITLES[place]
    assert desk.tabs.widget(place) is page
    assert page.isVisible()
    desk.show_page(0)
    desk.show_page(place)
    assert desk.page_in_front is page
    assert desk.built_pages.count(page) == 1
    assert lasting_window.actions_by_id[f"view.{page.title.lower()}"].isChecked()


def test_a_page_that_is_asked_for_before_it_is_shown_stays_behind(window) -> None:
    page = window.desk.models
    assert window.desk.page_in_front is window.desk.map
    assert not page.isVisible()
    assert window.desk.tabs.count() == len(TITLES)
    assert page.cloud is window.answers.cloud


def test_a_late_page_knows_theme_folder_units_and_what_it_was_made_to_show(make_window, tmp_path: Path) -> None:
    first = make_window()
    first.desk.slices.choose(("peak_density",))
    first.desk.candidates.choose_columns(("critical_temperature",))
    first.desk.readouts.unit_chosen.emit("critical_temperature", "kHz")
    first.desk.show_page(0)
    first.close()
    window = make_window()
    window.looks.choose(ThemeChoice.DARK)
    window.desk.map.write_data(tmp_path / "map.csv")
    assert [page.title for page in window.desk.built_pages] == ["Map"]
    slices, candidates = window.desk.slices, window.desk.candidates
    assert slices.chosen == ("peak_density",)
    assert candidates.names == ("critical_temperature",)
    assert slices.folder == candidates.folder == tmp_path
    assert all(plot.canvas.theme is DARK for page in (slices, candidates) for plot in page.plots)
    assert candidates._units["critical_temperature"] == "kHz"


def test_what_a_page_that_was_never_shown_remembers_is_not_lost(make_window) -> None:
    first = make_window()
    first.desk.candidates.choose_columns(("critical_temperature",))
    first.close()
    second = make_window()
    second.desk.slices.choose(("peak_density",))
    second.close()
    third = make_window()
    assert third.desk.candidates.names == ("critical_temperature",)
    assert third.desk.slices.chosen == ("peak_density",)


def test_a_page_that_comes_while_a_field_cannot_be_read_is_marked(window, settle) -> None:
    field = window.desk.bench.cloud.temperature
    field.selectAll()
    QTest.keyClicks(field, "hot")
    QTest.keyClick(field, Qt.Key.Key_Return)
    assert window.desk.verdict.stale
    window.desk.show_page(TITLES.index("Profile"))
    settle(window)
    assert all(plot.canvas.stale_text is not None for plot in window.desk.profile.plots)


def test_an_edit_on_a_late_page_is_a_step_of_history(make_window, settle) -> None:
    window = make_window(plan_with(DEFAULT_PLAN, {"species.field": "1000 G", "species.state": "F=1 mF=+1"}))
    window.desk.show_page(TITLES.index("Field"))
    settle(window)
    window.desk.field.plot.canvas.double_clicked.emit(1006.0, 0.0)
    assert window.document.plan.species.field.value == pytest.approx(0.1006)
    assert not window.document.clean


def test_another_plan_empties_fields_of_pages_that_are_there_and_builds_none(window, settle) -> None:
    window.files.new()
    settle(window)
    assert [page.title for page in window.desk.built_pages] == ["Map"]


def test_unfolding_readouts_from_the_front_builds_no_other_page(make_window, settle) -> None:
    window = make_window(size=(1000, 700))
    window.desk.show_readouts()
    assert window.desk.page_in_front is None
    window.resize(1500, 900)
    settle(window)
    assert window.desk.page_in_front is window.desk.map
    assert [page.title for page in window.desk.built_pages] == ["Map"]
