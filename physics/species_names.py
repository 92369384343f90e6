"""How people write the names of species and states, and the nearest of the known ones."""

from __future__ import annotations

import re
from collections.abc import Hashable, Iterable
from functools import lru_cache

_NUMBER = r"([+-]?\d+(?:/2|\.\d+)?)"
_LEVEL = re.compile(rf"\|?(?:f=)?{_NUMBER}[,;]?(?:m_?f?=)?{_NUMBER}[>⟩]?")
_SUBLEVEL = re.compile(rf"\|?m_?(j|f)?={_NUMBER}[>⟩]?")


def mass_order(key: str) -> tuple[int, str]:
    """Sort key that puts species by mass number, then by symbol."""
    digits = re.match(r"\d+", key)
    return (int(digits[0]) if digits else 0, key)


def plain_key(key: str) -> str:
    """The key without what does not matter: case, blanks, dashes, order of mass number and symbol, `*` or its word."""
    plain = re.sub(r"[\s-]", "", key).replace("*", "_metastable").casefold()
    reversed_order = re.fullmatch(r"([a-z]+)(\d+)(_metastable)?", plain)
    if reversed_order:
        plain = f"{reversed_order[2]}{reversed_order[1]}{reversed_order[3] or ''}"
    return plain


def suggest(key: str, known: list[str]) -> str:
    """End of a sentence that names the isotopes of the same element, else the keys that look most alike."""
    symbol = re.sub(r"[^a-z]", "", key.casefold().replace("metastable", ""))
    same_element = [name for name in known if re.fullmatch(rf"\d+{symbol}(_metastable)?", name, re.IGNORECASE)]
    nearest = nearest_first(plain_key(key), same_element or known)[:3]
    return "the nearest are " + ", ".join(nearest) if len(nearest) > 1 else f"the nearest is {nearest[0]}"


def nearest_first(text: str, known: Iterable[str]) -> list[str]:
    """The known names, the most alike first."""
    # difflib is needed only when something was misspelt.
    from difflib import SequenceMatcher

    plain = text.casefold()
    return sorted(known, key=lambda name: -SequenceMatcher(None, plain, name.casefold()).ratio())


@lru_cache(maxsize=1024)
def spelling(name: str) -> Hashable:
    """A form in which all ways of writing one state are equal: numbers where there are numbers, else bare text."""
    text = name.casefold().replace("\N{MINUS SIGN}", "-")
    text = re.sub(r"^\s*(an?\s+)?(equal\s+)?(mix(ture)?\s+of\s+)", "", text)
    parts = re.split(r"\s+and\s+|\s*&\s*", text)
    if len(parts) > 1:
        return frozenset(spelling(part) for part in parts)
    # A blank may be all that stands between two numbers: "1 -1", "9/2 7/2".
    bare = re.sub(r"(?<=\d)\s+(?=[+-]?\d)", ",", text.strip())
    bare = re.sub(r"\s", "", bare)
    level = _LEVEL.fullmatch(bare)
    if level and (re.search(r"[,;=]|\d[+-]", bare)):
        return ("F", _half(level[1]), _half(level[2]))
    sublevel = _SUBLEVEL.fullmatch(bare)
    if sublevel:
        return (sublevel[1] or "m", _half(sublevel[2]))
    return bare.replace(",", "")


def _half(text: str) -> float:
    top, _, bottom = text.partition("/")
    return float(top) / float(bottom or 1)
