"""Can a window open here? Asked before the window toolkit is started, because where a display or a system library
is missing the toolkit ends the whole process and leaves nothing to catch.

Every answer is one sentence that says what to do, or None when nothing stands in the way.
"""

from __future__ import annotations

import ctypes
import importlib
import os
import sys
from collections.abc import Callable, Iterable, Mapping

AS_TEXT = "`coldward state PLAN` gives the same answer as text"
APT_LINE = (
    "apt install libgl1 libegl1 libxkbcommon0 libdbus-1-3 libfontconfig1 libglib2.0-0 "
    "libxcb-cursor0 libxkbcommon-x11-0 libxcb-icccm4 libxcb-keysyms1 libxcb-shape0"
)

# Shared objects that the toolkit's wheels expect from the system, as named by their dynamic sections.
TOOLKIT_LIBRARIES = (
    "libGL.so.1",
    "libEGL.so.1",
    "libxkbcommon.so.0",
    "libdbus-1.so.3",
    "libfontconfig.so.1",
    "libglib-2.0.so.0",
)
X11_LIBRARIES = (
    "libxcb-cursor.so.0",
    "libxkbcommon-x11.so.0",
    "libxcb-icccm.so.4",
    "libxcb-image.so.0",
    "libxcb-keysyms.so.1",
    "libxcb-randr.so.0",
    "libxcb-render-util.so.0",
    "libxcb-shape.so.0",
    "libxcb-xkb.so.1",
)
WAYLAND_LIBRARIES = ("libwayland-client.so.0", "libwayland-cursor.so.0")
SCREENLESS_PLATFORMS = frozenset({"offscreen", "minimal", "vnc", "minimalegl"})

Load = Callable[[str], object]


def obstacle(
    environ: Mapping[str, str] | None = None, *, platform: str = sys.platform, load: Load = ctypes.CDLL
) -> str | None:
    """Why no window can open, as one sentence; None if one can. Only Linux is looked at: elsewhere the wheels carry
    all they need and a session always has a display."""
    if not platform.startswith("linux"):
        return None
    environ = os.environ if environ is None else environ
    missing = missing_libraries(TOOLKIT_LIBRARIES, load)
    if missing:
        return missing_sentence(missing)
    chosen = environ.get("QT_QPA_PLATFORM", "").split(":")[0].split(";")[0]
    if chosen in SCREENLESS_PLATFORMS:
        return None
    x11, wayland = bool(environ.get("DISPLAY")), bool(environ.get("WAYLAND_DISPLAY"))
    if not (x11 or wayland):
        return (
            "No display was found (neither DISPLAY nor WAYLAND_DISPLAY is set): start Coldward from a desktop session "
            f"or through `ssh -X`; {AS_TEXT}."
        )
    if wayland and chosen != "xcb" and not missing_libraries(WAYLAND_LIBRARIES, load) and wayland_answers(load):
        return None
    missing = missing_libraries(X11_LIBRARIES, load)
    if missing:
        return missing_sentence(missing)
    if x11 and not x11_answers(load):
        return (
            f"The display {environ['DISPLAY']!r} does not answer: check DISPLAY and that this user may open windows "
            f"there; {AS_TEXT}."
        )
    return None


def missing_libraries(names: Iterable[str], load: Load) -> tuple[str, ...]:
    """Those of the shared objects that the system cannot load."""

    def loads(name: str) -> bool:
        try:
            load(name)
        except OSError:
            return False
        return True

    return tuple(name for name in names if not loads(name))


def missing_sentence(names: tuple[str, ...]) -> str:
    noun = "library" if len(names) == 1 else "libraries"
    return f"The system {noun} {', '.join(names)} cannot be loaded: `{APT_LINE}` installs it; {AS_TEXT}."


def x11_answers(load: Load) -> bool:
    """Whether the X server that DISPLAY names accepts a connection; True where that cannot be asked."""
    try:
        xcb = load("libxcb.so.1")
    except OSError:
        return True
    if not isinstance(xcb, ctypes.CDLL):
        return True
    xcb.xcb_connect.restype = ctypes.c_void_p
    xcb.xcb_connection_has_error.argtypes = [ctypes.c_void_p]
    xcb.xcb_disconnect.argtypes = [ctypes.c_void_p]
    connection = xcb.xcb_connect(None, None)
    failed = bool(xcb.xcb_connection_has_error(connection))
    xcb.xcb_disconnect(connection)
    return not failed


def wayland_answers(load: Load) -> bool:
    """Whether the compositor that WAYLAND_DISPLAY names accepts a connection; True where that cannot be asked."""
    try:
        client = load("libwayland-client.so.0")
    except OSError:
        return False
    if not isinstance(client, ctypes.CDLL):
        return True
    client.wl_display_connect.restype = ctypes.c_void_p
    client.wl_display_disconnect.argtypes = [ctypes.c_void_p]
    display = client.wl_display_connect(None)
    if not display:
        return False
    client.wl_display_disconnect(display)
    return True


def toolkit_obstacle(import_module: Callable[[str], object] = importlib.import_module) -> str | None:
    """Why the window toolkit cannot be imported, as one sentence; None if it can."""
    try:
        import_module("PySide6.QtWidgets")
    except ModuleNotFoundError as error:
        return (
            f"The window needs Qt for Python, and {error.name} is not installed: "
            f"`pip install PySide6-Essentials` in this environment adds it; {AS_TEXT}."
        )
    except ImportError as error:
        # The loader's text starts with the missing shared object: "libEGL.so.1: cannot open shared object file ..."
        library = str(error).split(":")[0]
        return f"Qt for Python cannot be loaded ({library}): `{APT_LINE}` installs what it needs; {AS_TEXT}."
    return None
