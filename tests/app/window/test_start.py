"""Starting: an empty window first, and nothing slow before it; remembered state never in the way."""

import json
import subprocess
import sys
from pathlib import Path

import pytest
from PySide6.QtCore import QByteArray, QRect
from PySide6.QtGui import QGuiApplication

from app.plan import DEFAULT_PLAN, save_plan
from app.window.settings import FILE_NAME

ROOT = Path(__file__).parents[3]
SLOW = ("scipy.integrate", "scipy.optimize", "pint", "matplotlib.pyplot")

PROBE = """
import json, sys, time
from pathlib import Path
from app.window.start import Wishes, application, furnish_window
from app.window.main_window import MainWindow
from app.window.settings import Settings
app = application()
settings = Settings(Path(sys.argv[1]))
window = MainWindow(settings)
seen = []
window.first_painted.connect(lambda: seen.append(sorted(sys.modules)))
window.show()
while not seen:
    app.processEvents()
first = seen[0]
furnish_window(window, Wishes(settings_folder=Path(sys.argv[1])))
end = time.monotonic() + 60
while not (window.answers.settled and window.desk.map.plot.canvas.full_draws):
    app.processEvents()
    if window.banner.text or time.monotonic() > end:
        sys.exit(window.banner.text or "the map was never drawn")
print(json.dumps({"first": first, "later": sorted(sys.modules)}))
window.document.stack.setClean()
window.close()
"""


@pytest.fixture(scope="module")
def modules(tmp_path_factory: pytest.TempPathFactory) -> dict[str, list[str]]:
    """Modules loaded at the first paint, and once the plots are on screen, in a fresh process."""
    folder = tmp_path_factory.mktemp("settings")
    done = subprocess.run(
        [sys.executable, "-c", PROBE, str(folder)], capture_output=True, text=True, check=False, cwd=ROOT, timeout=100
    )
    assert done.returncode == 0, done.stderr
    found: dict[str, list[str]] = json.loads(done.stdout)
    return found


@pytest.mark.parametrize("name", [*SLOW, "numpy", "matplotlib", "tomlkit", "app.engine"])
def test_not_imported_before_the_first_paint(modules: dict[str, list[str]], name: str) -> None:
    assert name not in modules["first"]


@pytest.mark.parametrize("name", SLOW)
def test_not_needed_to_show_the_first_plots(modules: dict[str, list[str]], name: str) -> None:
    assert name not in modules["later"]


def test_a_start_loads_no_page_but_the_one_in_front(modules: dict[str, list[str]]) -> None:
    assert [name for name in modules["later"] if name.startswith("app.pages.")] == ["app.pages.map"]
    assert not [name for name in modules["later"] if name.startswith(("app.widgets.ramp", "app.widgets.candidate"))]


def test_the_probe_saw_a_window_with_plots(modules: dict[str, list[str]]) -> None:
    assert "PySide6.QtWidgets" in modules["first"]
    assert "matplotlib.figure" in modules["later"]


def test_a_bad_settings_file_does_not_stop_the_window_and_is_told_of(make_window, tmp_path: Path) -> None:
    folder = tmp_path / "settings"
    folder.mkdir()
    (folder / FILE_NAME).write_bytes(b"\x00\x01 nonsense")
    window = make_window()
    assert "set aside" in window.banner.text
    assert window.desk.verdict.sentence


def test_size_page_and_columns_come_back(make_window) -> None:
    first = make_window(size=(1300, 820))
    first.desk.show_page(2)
    first.close()
    second = make_window()
    assert second.desk.page.title == "Profile"
    assert second.desk.built_pages == [second.desk.page]


@pytest.mark.parametrize("blob", [b"", b"garbage", bytes(range(200))])
def test_remembered_sizes_that_make_no_sense_are_passed_over(make_window, tmp_path: Path, blob: bytes) -> None:
    from app.window.main_window import MainWindow
    from app.window.settings import Settings

    settings = Settings(tmp_path / "settings")
    for key in ("window/geometry", "window/columns", "window/side"):
        settings.put(key, QByteArray(blob))
    settings.flush()
    window = MainWindow(Settings(tmp_path / "settings"))
    screens = [screen.availableGeometry() for screen in QGuiApplication.screens()]
    assert any(screen.contains(window.geometry()) for screen in screens)
    assert make_window().desk.columns.sizes()[0] > 200


def test_a_window_left_far_outside_comes_back_onto_a_screen(make_window, tmp_path: Path) -> None:
    from app.window.main_window import MainWindow
    from app.window.settings import Settings

    first = make_window(size=(700, 500))
    first.setGeometry(QRect(-5000, -5000, 700, 500))
    first.close()
    second = MainWindow(Settings(tmp_path / "settings"))
    assert any(screen.availableGeometry().contains(second.geometry()) for screen in QGuiApplication.screens())


def coldward(*arguments: str, **environment: str) -> subprocess.CompletedProcess[str]:
    import os

    clean = {name: value for name, value in os.environ.items() if name not in ("DISPLAY", "WAYLAND_DISPLAY")}
    clean.pop("QT_QPA_PLATFORM", None)
    return subprocess.run(
        [sys.executable, "-m", "app", "window", *arguments],
        capture_output=True, text=True, check=False, cwd=ROOT, timeout=110, env=clean | environment,
    )  # fmt: skip


def test_pictures_need_no_display_and_show_every_page(tmp_path: Path) -> None:
    plan = tmp_path / "plan.toml"
    save_plan(DEFAULT_PLAN, plan)
    done = coldward(
        str(plan), "--pictures", str(tmp_path / "shots"), "--settings-dir", str(tmp_path / "s"), "--theme", "dark",
        "--size", "1024x700", "--scale", "2",
    )  # fmt: skip
    assert done.returncode == 0, done.stderr
    names = {path.name for path in (tmp_path / "shots").iterdir()}
    assert names == {
        "map.png", "slices.png", "profile.png", "trap.png", "ramp.png", "field.png", "collisions.png", "models.png",
        "mixture.png", "candidates.png", "readouts.png", "about.png", "limits.png", "shortcuts.png",
    }  # fmt: skip
    from PIL import Image

    with Image.open(tmp_path / "shots" / "map.png") as image:
        assert image.size == (2048, 1400)
        corner = image.convert("RGB").getpixel((5, 1390))
        assert isinstance(corner, tuple)
        assert max(corner) < 80  # dark
        assert len(image.convert("RGB").getcolors(1 << 24) or ()) > 200  # a colour field was painted


def test_pictures_leave_alone_what_a_user_has_made_of_the_window(tmp_path: Path) -> None:
    own = {name: str(tmp_path / name) for name in ("XDG_CONFIG_HOME", "XDG_STATE_HOME")}
    left_behind = tmp_path / "XDG_STATE_HOME" / "coldward" / "recovery" / "session-1.toml"
    left_behind.parent.mkdir(parents=True)
    left_behind.write_text("a copy that the window would offer", encoding="utf-8")
    done = coldward("--pictures", str(tmp_path / "shots"), "--size", "640x480", **own)
    assert done.returncode == 0, done.stderr
    assert [path for path in tmp_path.rglob("*") if path.is_file() and path.suffix != ".png"] == [left_behind]


def test_pictures_of_a_plan_that_cannot_be_read_are_refused_in_one_sentence(tmp_path: Path) -> None:
    plan = tmp_path / "bad.toml"
    plan.write_text("coldward = 1\n[cloud]\natoms = 'many'\n")
    done = coldward(str(plan), "--pictures", str(tmp_path / "shots"), "--settings-dir", str(tmp_path / "s"))
    assert done.returncode == 1
    errors = [line for line in done.stderr.splitlines() if line.startswith("coldward:")]
    assert len(errors) == 1
    assert "bad.toml" in errors[0]
    assert "Traceback" not in done.stderr


@pytest.mark.skipif(not sys.platform.startswith("linux"), reason="other systems always have a display")
def test_without_a_display_one_sentence_says_how_to_get_the_answer_as_text(tmp_path: Path) -> None:
    done = coldward("--settings-dir", str(tmp_path / "s"))
    assert done.returncode == 1
    assert done.stdout == ""
    assert done.stderr.startswith("coldward: No display was found")
    assert "`coldward state PLAN` gives the same answer as text" in done.stderr
    assert len(done.stderr.splitlines()) == 1


@pytest.mark.parametrize("size", ["big", "1400", "10x10", "1400x900x2"])
def test_a_size_that_makes_no_sense_is_refused(size: str) -> None:
    done = coldward("--size", size)
    assert done.returncode == 1
    assert f'--size must be a width and a height from 200 to 10000, such as 1400x900, got "{size}"' in done.stderr
