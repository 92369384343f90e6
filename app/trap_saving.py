"""Saving beams and coils: sections that stay, go, come or change places, each with its comments."""

from __future__ import annotations

import tomllib
from collections.abc import Sequence
from typing import Any

from app.toml_blocks import Block, blocks_of, joined, replaced, with_lines
from app.toml_entries import missing_lines, put_changed, section_text
from app.trap_choices import BEAM_FIELDS, BEAMS, COILS, COILS_FIELDS, BeamChoice, CoilsChoice, TrapChoice
from app.trap_file import USUAL, beam_entries, beam_names, coils_entries


def beam_text(beam: BeamChoice) -> str:
    """A beam as a new section."""
    return section_text(f"[[{BEAMS}]]", BEAM_FIELDS, beam_entries(beam))


def coils_text(coils: CoilsChoice) -> str:
    """Coils as a new section."""
    return section_text(f"[{COILS}]", COILS_FIELDS, coils_entries(coils))


def sources_of(old: Sequence[BeamChoice], new: Sequence[BeamChoice]) -> list[int | None]:
    """For each new beam the old one that it was: of the same name, else, where neither name is found on the other
    side, at the same place; None for one that was not there."""
    places = {beam.name: place for place, beam in enumerate(old)}
    names = {beam.name for beam in new}
    sources = [places.get(beam.name) for beam in new]
    for place, source in enumerate(sources):
        if source is None and place < len(old) and old[place].name not in names:
            sources[place] = place
    return sources


def rearranged(text: str, old: TrapChoice | None, new: TrapChoice) -> str | None:
    """The file with the sections of the new beams and coils in order, those that it had still with what they said.

    old : as the file had it. Beams and coils beside frequencies did not count, and go.
    None where they do not stand in sections of their own.
    """
    before = blocks_of(text)
    slots = [block for block in before if block.path == BEAMS]
    coils = [block for block in before if block.path == COILS]
    had_beams = () if old is None else old.beams
    had_coils = old is not None and old.coils is not None
    if old is not None and not old.harmonic and (len(slots), len(coils)) != (len(had_beams), int(had_coils)):
        return None
    sources = sources_of(had_beams, new.beams)
    beams = [
        Block(BEAMS, beam_text(beam)) if source is None else slots[source]
        for beam, source in zip(new.beams, sources, strict=True)
    ]
    if new.harmonic and not any(block.path == "trap" for block in before):
        beams = [Block("trap", "[trap]\n")]
    after = replaced(before, slots, beams, _home)
    if not (had_coils and new.coils is not None):
        own = [] if new.coils is None else [Block(COILS, coils_text(new.coils))]
        after = replaced(after, coils, own, _home)
    return joined(after, before)


def _home(blocks: Sequence[Block]) -> int:
    """Where the first beam or the coils go: after the trap's or else the species' last block, or at the end."""
    homes = [[place for place, b in enumerate(blocks, start=1) if b.path.split(".")[0] == home] for home in _HOMES]
    return next((places[-1] for places in homes if places), len(blocks))


_HOMES = ("trap", "species")


def with_new_keys(text: str, trap: TrapChoice) -> str:
    """The file, whose sections are in order already, with a line for each key of beams and coils that has none.

    Of beams without a name, all get one where one would be called otherwise than it should.
    """
    made = tomllib.loads(text).get("trap", {})
    sections = made.get("beam", [])
    unnamed = beam_names(sections) != [beam.name for beam in trap.beams]
    blocks = blocks_of(text)
    slots = [place for place, block in enumerate(blocks) if block.path == BEAMS]
    for place, section, beam in zip(slots, sections, trap.beams, strict=True):
        entries = beam_entries(beam)
        named = {"name": entries.pop("name")}
        name = missing_lines(section, BEAM_FIELDS, named) if unnamed else []
        blocks[place] = with_lines(blocks[place], missing_lines(section, BEAM_FIELDS, entries))
        blocks[place] = with_lines(blocks[place], name, first=True)
    if trap.coils is not None:
        place = next(place for place, block in enumerate(blocks) if block.path == COILS)
        lines = missing_lines(made["coils"], COILS_FIELDS, coils_entries(trap.coils))
        blocks[place] = with_lines(blocks[place], lines)
    return "".join(block.text for block in blocks)


def put_beams_and_coils(document: Any, old: TrapChoice, new: TrapChoice) -> None:
    """Set in a document, whose sections are in order and whose keys are there, what the old trap said otherwise."""
    if new.beams and old.beams:
        sections = document["trap"]["beam"]
        for section, beam, source in zip(sections, new.beams, sources_of(old.beams, new.beams), strict=True):
            if source is not None:
                before, after = beam_entries(old.beams[source]), beam_entries(beam)
                if "name" not in section:
                    before["name"] = after["name"]
                put_changed(section, BEAM_FIELDS, before, after, USUAL)
    if new.coils is not None and old.coils is not None:
        section = document["trap"]["coils"]
        put_changed(section, COILS_FIELDS, coils_entries(old.coils), coils_entries(new.coils), USUAL)
