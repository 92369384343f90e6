"""Saving sections of a plan file that stay, go, come or change places, each with its comments.

Sections of one path are matched with those that the file had; a matched one is moved as it stands and then changed
where it says something else.
"""

from __future__ import annotations

import tomllib
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from functools import partial
from types import MappingProxyType
from typing import Any

from app.plan_field import PlanField
from app.toml_blocks import Block, blocks_of, joined, replaced, with_lines
from app.toml_entries import missing_lines, put_changed, section_text, written

_NOTHING: Mapping[str, Any] = MappingProxyType({})


@dataclass(frozen=True, kw_only=True)
class Section:
    """What one section of the file says.

    path : dotted path of its header
    many : whether it is one of a list, [[path]]
    fields, entries : by key
    usual : by key, what holds where the key is left out
    identity : keys that tell which one of a list it is, if it is changed
    inner : sections within it, by path
    """

    path: str
    fields: Mapping[str, PlanField]
    entries: Mapping[str, object]
    many: bool = True
    usual: Mapping[str, object] = field(default_factory=lambda: _NOTHING)
    identity: tuple[str, ...] = ()
    inner: Mapping[str, Sequence[Section]] = field(default_factory=lambda: _NOTHING)

    @property
    def text(self) -> str:
        """As a new section, with those within it."""
        header = f"[[{self.path}]]" if self.many else f"[{self.path}]"
        own = section_text(header, self.fields, self.entries)
        return "\n".join([own, *(section.text for sections in self.inner.values() for section in sections)])

    @property
    def said(self) -> object:
        """All that it says, to be compared."""
        own = tuple((name, written(entry)) for name, entry in self.entries.items())
        return own, tuple((path, tuple(section.said for section in inner)) for path, inner in self.inner.items())

    @property
    def known_by(self) -> tuple[object, ...]:
        return tuple(written(self.entries[name]) for name in self.identity if name in self.entries)


Sections = Mapping[str, Sequence[Section]]
"""Sections by path, in order."""


def sources_of(old: Sequence[Section], new: Sequence[Section]) -> list[int | None]:
    """For each new section the old one that it was: one that said the same, else one of the same identity, else the
    next that is left over; None for one that was not there."""
    sources: list[int | None] = [None] * len(new)

    def match(alike: Callable[[Section, Section], bool]) -> None:
        for place, section in enumerate(new):
            if sources[place] is None:
                free = (other for other in range(len(old)) if other not in sources)
                sources[place] = next((other for other in free if alike(old[other], section)), None)

    match(lambda a, b: a.said == b.said)
    match(lambda a, b: bool(a.known_by) and a.known_by == b.known_by)
    match(lambda a, b: True)
    return sources


def with_sections(text: str, old: Sections, new: Sections) -> str | None:
    """The file with the new sections in place of the old ones, of the same paths; None where the old ones do not
    stand in sections of their own."""
    before = _groups(text, old)
    after = before
    pairs: dict[str, list[tuple[Section | None, Section]]] = {}
    for path in new:
        slots = [block for block in before if block.path == path]
        olds, news = _with_bare_header(path, len(slots), old, new)
        if len(slots) != len(olds):
            return None
        sources = sources_of(olds, news)
        pairs[path] = [(None if n is None else olds[n], section) for n, section in zip(sources, news, strict=True)]
        blocks = [
            Block(path, section.text) if n is None else slots[n] for n, section in zip(sources, news, strict=True)
        ]
        after = replaced(after, slots, blocks, partial(_home, path))
    groups = _groups(joined(after, before), old)
    for path, found in pairs.items():
        places = [place for place, block in enumerate(groups) if block.path == path]
        if len(places) != len(found):
            return None
        for place, (source, section) in zip(places, found, strict=True):
            if source is not None and source.said != section.said:
                changed = _changed(groups[place].text, source, section)
                if changed is None:
                    return None
                groups[place] = Block(path, changed)
    return "".join(block.text for block in groups)


def _with_bare_header(path: str, slots: int, old: Sections, new: Sections) -> tuple[list[Section], list[Section]]:
    """The old and the new sections of a path. A header of the file that says nothing, or what is usual, counts as one:
    it stays unless all that was within it goes. So does one that no longer says anything of its own."""
    olds, news = list(old[path]), list(new[path])
    had, has = (any(part[p] for p in part if p.startswith(f"{path}.")) for part in (old, new))
    bare = slots == 1 and not olds
    if bare:
        olds = [Section(path=path, many=False, fields={}, entries={})]
    if slots == 1 and not news and (has or (bare and not had)):
        news = [replace(olds[0], entries={})]
    return olds, news


def _groups(text: str, sections: Sections) -> list[Block]:
    """The blocks of a text, those within a section that has inner ones joined to it."""
    whole = {path for path, found in sections.items() if any(section.inner for section in found)}
    groups: list[Block] = []
    for block in blocks_of(text):
        last = groups[-1] if groups else None
        if last is not None and last.path in whole and block.path.startswith(f"{last.path}."):
            groups[-1] = Block(last.path, last.text + block.text)
        else:
            groups.append(block)
    return groups


def _home(path: str, blocks: Sequence[Block]) -> int:
    """Where the first section of a path goes: before those within it, else after its neighbours, else at the end."""
    within = [place for place, block in enumerate(blocks) if block.path.startswith(f"{path}.")]
    root = path.split(".")[0]
    beside = [place for place, block in enumerate(blocks, start=1) if block.path.split(".")[0] == root]
    return within[0] if within else beside[-1] if beside else len(blocks)


def _changed(text: str, old: Section, new: Section) -> str | None:
    """A section, as it stands in the file with what is within it, that says what the new one does."""
    body = text.rstrip()
    tail = text[len(body) :]
    if old.inner:
        end = "\r\n" if tail.startswith("\r\n") else "\n"
        arranged = with_sections(body + end, old.inner, new.inner)
        if arranged is None:
            return None
        text = arranged.rstrip() + tail
    blocks = blocks_of(text)
    for place, block in enumerate(blocks):
        if block.path == new.path:
            blocks[place] = Block(block.path, _with_entries(block, old, new))
    return "".join(block.text for block in blocks)


def _with_entries(block: Block, old: Section, new: Section) -> str:
    """One block with the entries of the new section. Alone it is a TOML text of its own."""
    import tomlkit

    lines = missing_lines(_table(tomllib.loads(block.text), new.path), new.fields, new.entries)
    document = tomlkit.parse(with_lines(block, lines).text)
    put_changed(_table(document, new.path), new.fields, old.entries, new.entries, new.usual)
    return tomlkit.dumps(document)


def _table(document: Any, path: str) -> Any:
    for key in path.split("."):
        document = document[key]
        if isinstance(document, list):
            document = document[-1]
    return document
