"""What is said before a window toolkit would end the process."""

import sys

import pytest

from app.window.preflight import APT_LINE, obstacle, toolkit_obstacle


def loads_everything(name: str) -> object:
    return object()


def loads_all_but(*missing: str):
    def load(name: str) -> object:
        if name in missing:
            raise OSError(f"{name}: cannot open shared object file")
        return object()

    return load


def test_no_display_is_one_sentence_with_the_way_to_a_text_answer() -> None:
    sentence = obstacle({}, platform="linux", load=loads_everything)
    assert sentence is not None
    assert sentence.startswith("No display was found")
    assert "`coldward state PLAN`" in sentence
    assert "\n" not in sentence


@pytest.mark.parametrize("environ", [{"DISPLAY": ":0"}, {"WAYLAND_DISPLAY": "wayland-0"}])
def test_nothing_is_said_where_a_window_can_open(environ: dict[str, str]) -> None:
    assert obstacle(environ, platform="linux", load=loads_everything) is None


def test_offscreen_needs_no_display() -> None:
    assert obstacle({"QT_QPA_PLATFORM": "offscreen"}, platform="linux", load=loads_everything) is None


@pytest.mark.parametrize("library", ["libxcb-cursor.so.0", "libEGL.so.1", "libGL.so.1", "libxkbcommon.so.0"])
def test_a_missing_library_is_named_with_the_apt_line(library: str) -> None:
    sentence = obstacle({"DISPLAY": ":0"}, platform="linux", load=loads_all_but(library))
    assert sentence is not None
    assert library in sentence
    assert APT_LINE in sentence
    assert "coldward state PLAN" in sentence


def test_xcb_is_not_asked_for_where_wayland_answers() -> None:
    environ = {"WAYLAND_DISPLAY": "wayland-0", "DISPLAY": ":0"}
    assert obstacle(environ, platform="linux", load=loads_all_but("libxcb-cursor.so.0")) is None


def test_a_display_that_does_not_answer_is_told_before_the_toolkit_ends_the_process() -> None:
    if not sys.platform.startswith("linux"):
        pytest.skip("asks an X server")
    sentence = obstacle({"DISPLAY": ":93"}, load=_with_dead_display)
    assert sentence is not None
    assert "':93' does not answer" in sentence


def _with_dead_display(name: str) -> object:
    import ctypes
    import os

    if name == "libxcb.so.1":
        os.environ["DISPLAY"] = ":93"
    try:
        return ctypes.CDLL(name) if name == "libxcb.so.1" else object()
    except OSError:
        pytest.skip("libxcb is not here")


@pytest.fixture(autouse=True)
def _keep_display(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setenv("DISPLAY", "")


def test_other_systems_are_not_looked_at() -> None:
    assert obstacle({}, platform="darwin", load=loads_all_but("libGL.so.1")) is None


def test_a_toolkit_that_is_not_installed_is_told_in_one_sentence() -> None:
    def importing(name: str) -> object:
        raise ModuleNotFoundError("No module named 'PySide6'", name="PySide6")

    sentence = toolkit_obstacle(importing)
    assert sentence is not None
    assert "PySide6 is not installed" in sentence
    assert "pip install PySide6-Essentials" in sentence


def test_a_toolkit_that_lacks_a_shared_object_gets_the_apt_line() -> None:
    def importing(name: str) -> object:
        raise ImportError("libEGL.so.1: cannot open shared object file: No such file or directory")

    sentence = toolkit_obstacle(importing)
    assert sentence is not None
    assert "(libEGL.so.1)" in sentence
    assert APT_LINE in sentence
