"""Every action of the window, in one table: menus, shortcuts, tips and the list of shortcuts in Help come from it."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from enum import Enum
from typing import TYPE_CHECKING

from PySide6.QtGui import QAction, QActionGroup, QKeySequence
from PySide6.QtWidgets import QMenu

from app.window.settings import ThemeChoice

if TYPE_CHECKING:
    from app.window.main_window import MainWindow


class MenuName(Enum):
    """The menus, in order; the ampersand marks the mnemonic."""

    FILE = "&File"
    EDIT = "&Edit"
    VIEW = "&View"
    PLOT = "&Plot"
    HELP = "&Help"

    @property
    def plain(self) -> str:
        return self.value.replace("&", "")


Keys = QKeySequence.StandardKey | str | None


@dataclass(frozen=True)
class ActionSpec:
    """One action. `keys` is a standard key of the platform wherever one exists; `choice` names a group of which one
    is checked; `starts_section` draws a line above it."""

    id: str
    menu: MenuName
    text: str
    keys: Keys
    tip: str
    handler: Callable[[MainWindow], object]
    choice: str = ""
    starts_section: bool = False


_F, _E, _V, _P, _H = MenuName.FILE, MenuName.EDIT, MenuName.VIEW, MenuName.PLOT, MenuName.HELP
_K = QKeySequence.StandardKey

ACTIONS: tuple[ActionSpec, ...] = (
    ActionSpec("file.new", _F, "&New plan", _K.New, "Start from the demo plan", lambda w: w.files.new()),
    ActionSpec("file.open", _F, "&Open…", _K.Open, "Read a plan file", lambda w: w.files.open()),
    ActionSpec(
        "file.save",
        _F,
        "&Save",
        _K.Save,
        "Write the plan to its file",
        lambda w: w.files.save(),
        starts_section=True,
    ),
    ActionSpec(
        "file.save_as",
        _F,
        "Save &as…",
        "Ctrl+Shift+S",
        "Write the plan to another file",
        lambda w: w.files.save_as(),
    ),
    ActionSpec("file.quit", _F, "&Quit", "Ctrl+Q", "Close the window", lambda w: w.close(), starts_section=True),
    ActionSpec("edit.undo", _E, "&Undo", _K.Undo, "Take the last change back", lambda w: w.document.stack.undo()),
    ActionSpec("edit.redo", _E, "&Redo", _K.Redo, "Make the change again", lambda w: w.document.stack.redo()),
    ActionSpec(
        "edit.copy",
        _E,
        "&Copy",
        _K.Copy,
        "Copy what is selected: a text, a readout with its unit, or the plot",
        lambda w: w.copy(),
        starts_section=True,
    ),
    ActionSpec(
        "edit.copy_all",
        _E,
        "Copy &all readouts",
        "Ctrl+Shift+C",
        "Copy every readout as a table of tab-separated text",
        lambda w: w.desk.readouts.copy_all(),
    ),
    ActionSpec(
        "edit.copy_verdict",
        _E,
        "Copy &verdict",
        "Ctrl+Shift+V",
        "Copy the verdict as text",
        lambda w: w.desk.verdict.copy(),
    ),
    ActionSpec(
        "view.map",
        _V,
        "&Map",
        "Ctrl+1",
        "Atom number against temperature",
        lambda w: w.desk.show_page(0),
        "page",
    ),
    ActionSpec(
        "view.slices",
        _V,
        "&Slices",
        "Ctrl+2",
        "Quantities along T and along N",
        lambda w: w.desk.show_page(1),
        "page",
    ),
    ActionSpec(
        "view.profile",
        _V,
        "&Profile",
        "Ctrl+3",
        "Density along an axis",
        lambda w: w.desk.show_page(2),
        "page",
    ),
    ActionSpec(
        "view.trap",
        _V,
        "Tr&ap",
        "Ctrl+4",
        "The potential of the trap, and what becomes of it while a control is turned",
        lambda w: w.desk.show_page(3),
        "page",
    ),
    ActionSpec(
        "view.ramp",
        _V,
        "Ramp of &evaporation",
        "Ctrl+5",
        "The evaporation, stage by stage",
        lambda w: w.desk.show_page(4),
        "page",
    ),
    ActionSpec(
        "view.field",
        _V,
        "&Field",
        "Ctrl+6",
        "Scattering length against magnetic field",
        lambda w: w.desk.show_page(5),
        "page",
    ),
    ActionSpec(
        "view.collisions",
        _V,
        "&Collisions",
        "Ctrl+7",
        "How fast atoms rethermalise, are lost and are heated",
        lambda w: w.desk.show_page(6),
        "page",
    ),
    ActionSpec(
        "view.models",
        _V,
        "M&odels",
        "Ctrl+8",
        "The cloud by every model that could describe it",
        lambda w: w.desk.show_page(7),
        "page",
    ),
    ActionSpec(
        "view.mixture",
        _V,
        "Mi&xture",
        "Ctrl+9",
        "The passenger beside the first species, at rest and along the ramp",
        lambda w: w.desk.show_page(8),
        "page",
    ),
    ActionSpec(
        "view.candidates",
        _V,
        "Cand&idates",
        "Alt+0",  # Ctrl+0 shows the whole plot
        "Species and states side by side",
        lambda w: w.desk.show_page(9),
        "page",
    ),
    ActionSpec("view.readouts", _V, "&Readouts", "Ctrl+R", "Go to the readouts", lambda w: w.desk.show_readouts()),
    ActionSpec(
        "view.why",
        _V,
        "&Why this number…",
        "Ctrl+I",
        "Inputs, formulas and intermediate values of the selected readout",
        lambda w: w.desk.readouts.ask_why(),
    ),
    ActionSpec(
        "view.next_pane",
        _V,
        "&Next pane",
        "F6",
        "Move the keyboard to the next part of the window",
        lambda w: w.desk.next_pane(1),
        starts_section=True,
    ),
    ActionSpec(
        "view.previous_pane",
        _V,
        "Pre&vious pane",
        "Shift+F6",
        "Move the keyboard to the part before",
        lambda w: w.desk.next_pane(-1),
    ),
    ActionSpec(
        "view.theme_system",
        _V,
        "Colours of the s&ystem",
        None,
        "Follow the system as it turns light or dark",
        lambda w: w.looks.choose(ThemeChoice.SYSTEM),
        "theme",
        starts_section=True,
    ),
    ActionSpec(
        "view.theme_light",
        _V,
        "&Light",
        None,
        "Always light",
        lambda w: w.looks.choose(ThemeChoice.LIGHT),
        "theme",
    ),
    ActionSpec(
        "view.theme_dark",
        _V,
        "&Dark",
        None,
        "Always dark",
        lambda w: w.looks.choose(ThemeChoice.DARK),
        "theme",
    ),
    ActionSpec(
        "view.reset",
        _V,
        "Rese&t layout",
        None,
        "Give every part of the window its first size again",
        lambda w: w.desk.reset_layout(),
        starts_section=True,
    ),
    ActionSpec("plot.home", _P, "&Whole plot", "Ctrl+0", "Show the whole range again", lambda w: w.desk.page.home()),
    ActionSpec("plot.zoom_in", _P, "Zoom &in", _K.ZoomIn, "Show a smaller range", lambda w: w.desk.page.zoom(0.5)),
    ActionSpec("plot.zoom_out", _P, "Zoom &out", _K.ZoomOut, "Show a larger range", lambda w: w.desk.page.zoom(2.0)),
    ActionSpec(
        "plot.left",
        _P,
        "Pan l&eft",
        "Ctrl+Alt+Left",
        "Move the range to the left",
        lambda w: w.desk.page.pan(-0.2, 0.0),
    ),
    ActionSpec(
        "plot.right",
        _P,
        "Pan ri&ght",
        "Ctrl+Alt+Right",
        "Move the range to the right",
        lambda w: w.desk.page.pan(0.2, 0.0),
    ),
    ActionSpec("plot.up", _P, "Pan &up", "Ctrl+Alt+Up", "Move the range up", lambda w: w.desk.page.pan(0.0, 0.2)),
    ActionSpec(
        "plot.down",
        _P,
        "Pan &down",
        "Ctrl+Alt+Down",
        "Move the range down",
        lambda w: w.desk.page.pan(0.0, -0.2),
    ),
    ActionSpec("plot.limits", _P, "&Limits…", "Ctrl+L", "Type exact limits", lambda w: w.desk.page.ask_limits()),
    ActionSpec(
        "plot.copy",
        _P,
        "&Copy picture",
        "Ctrl+Alt+C",
        "Copy the plot as a picture",
        lambda w: w.desk.page.copy_picture(),
        starts_section=True,
    ),
    ActionSpec(
        "plot.save",
        _P,
        "&Save picture…",
        "Ctrl+E",
        "Save the plot as PNG, SVG or PDF",
        lambda w: w.desk.page.save_picture(),
    ),
    ActionSpec(
        "plot.data",
        _P,
        "Save da&ta…",
        "Ctrl+Shift+E",
        "Save the numbers behind the plot as CSV",
        lambda w: w.desk.page.save_data(),
    ),
    ActionSpec(
        "help.shortcuts",
        _H,
        "&Keyboard shortcuts",
        _K.HelpContents,
        "All actions and their keys",
        lambda w: w.show_shortcuts(),
    ),
    ActionSpec(
        "help.words",
        _H,
        "&Glossary",
        None,
        "Every quantity with its formula and source",
        lambda w: w.show_glossary(),
    ),
    ActionSpec(
        "help.about",
        _H,
        "&About Coldward",
        None,
        "Version, licences, and what these numbers are for",
        lambda w: w.show_about(),
    ),
)


def key_sequences(spec: ActionSpec) -> list[QKeySequence]:
    """The keys of an action here: a standard key may be several, or none on some platform."""
    if spec.keys is None:
        return []
    if isinstance(spec.keys, QKeySequence.StandardKey):
        return QKeySequence.keyBindings(spec.keys)
    return [QKeySequence(spec.keys)]


def install_actions(window: MainWindow) -> dict[str, QAction]:
    """Make the menus and actions of the table on a window; returns the actions by id."""
    menus: dict[MenuName, QMenu] = {}
    groups: dict[str, QActionGroup] = {}
    actions: dict[str, QAction] = {}
    taken: set[str] = set()
    for spec in ACTIONS:
        menu = menus.get(spec.menu)
        if menu is None:
            menu = menus[spec.menu] = window.menuBar().addMenu(spec.menu.value)
            menu.setToolTipsVisible(True)
        if spec.starts_section:
            menu.addSeparator()
        action = QAction(spec.text, window)
        action.setObjectName(spec.id)
        # A platform may list one key under two standard keys: the first action in the table has it.
        keys = [key for key in key_sequences(spec) if key.toString() not in taken]
        taken.update(key.toString() for key in keys)
        action.setShortcuts(keys)
        action.setToolTip(spec.tip)
        action.setStatusTip(spec.tip)
        if spec.choice:
            action.setCheckable(True)
            group = groups.setdefault(spec.choice, QActionGroup(window))
            group.addAction(action)
        action.triggered.connect(lambda _=False, chosen=spec: chosen.handler(window))
        menu.addAction(action)
        actions[spec.id] = action
    return actions
