"""The plan's history: steps, merging, the clean state."""

from dataclasses import dataclass

from hypothesis import given
from hypothesis import strategies as st
from PySide6.QtWidgets import QApplication

from app.window.undo import Document


@dataclass(frozen=True)
class Stand:
    """Stands for a plan: the history looks at nothing but equality."""

    temperature: int = 0
    atoms: int = 0


def test_undo_names_the_step_and_goes_back(qapp: QApplication) -> None:
    document = Document(Stand())
    seen: list[Stand] = []
    document.plan_changed.connect(seen.append)
    document.edit(Stand(temperature=5), "temperature")
    assert document.stack.undoText() == "change of temperature"
    assert not document.clean
    document.stack.undo()
    assert document.plan == Stand()
    assert document.clean
    assert seen == [Stand(temperature=5), Stand()]


def test_edits_of_one_key_are_one_step_and_others_are_not(qapp: QApplication) -> None:
    document = Document(Stand())
    for value in range(1, 100):
        document.edit(Stand(temperature=value), "cloud", "drag 1")
    document.edit(Stand(temperature=200), "cloud", "drag 2")
    assert document.stack.count() == 2
    document.stack.undo()
    assert document.plan == Stand(temperature=99)
    document.stack.undo()
    assert document.plan == Stand()


def test_a_drag_that_ends_where_it_began_leaves_no_step(qapp: QApplication) -> None:
    document = Document(Stand())
    document.edit(Stand(temperature=3), "cloud", "drag 1")
    document.edit(Stand(), "cloud", "drag 1")
    assert document.stack.count() == 0
    assert document.clean


def test_a_step_never_merges_over_a_saved_state(qapp: QApplication) -> None:
    document = Document(Stand())
    document.edit(Stand(temperature=1), "temperature", "typing")
    document.stack.setClean()
    document.edit(Stand(temperature=2), "temperature", "typing")
    assert not document.clean
    document.stack.undo()
    assert document.clean
    assert document.plan == Stand(temperature=1)


def test_an_edit_to_the_same_plan_is_no_step(qapp: QApplication) -> None:
    document = Document(Stand())
    document.edit(Stand(), "nothing")
    assert document.stack.count() == 0


@given(st.lists(st.tuples(st.integers(0, 4), st.integers(0, 4), st.sampled_from(["", "a", "b"])), max_size=30))
def test_undo_all_is_the_start_and_redo_all_the_end(edits: list[tuple[int, int, str]]) -> None:
    QApplication.instance() or QApplication([])
    document = Document(Stand())
    for temperature, atoms, key in edits:
        document.edit(Stand(temperature, atoms), "something", key)
    end = document.plan
    while document.stack.canUndo():
        document.stack.undo()
    assert document.plan == Stand()
    while document.stack.canRedo():
        document.stack.redo()
    assert document.plan == end
