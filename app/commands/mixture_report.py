"""What a passenger adds to the answers of verbs: the two clouds together, as an object and as text."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

from app.mixture_quantities import MIXTURE_QUANTITIES
from app.mixture_words import (
    mixing_text,
    mixture_caveat_lines,
    mixture_caveat_text,
    mixture_rows,
    reason_unknown,
)
from app.tables import columns

if TYPE_CHECKING:
    from app.answers.mixture import MixtureAnswer


def mixture_body(answer: MixtureAnswer, own: dict[str, Any] | None) -> dict[str, Any]:
    """Species and state, whether the trap holds it, its own answer, and the two clouds together in SI.

    own : the passenger's own answer, as of `coldward state`; None where the trap does not answer for it
    """
    mixing = None if answer.mixture is None else answer.mixture.mixing
    return {
        "key": answer.state.key,
        "state": answer.state.name,
        "trapped": answer.trapped,
        "reason": answer.reason or None,
        "own_trap": answer.own_trap,
        **(own if own is not None else {"model": None, "quantities": {}, "caveats": []}),
        "mixture": {
            "quantities": {name: _quantity(answer, name) for name in MIXTURE_QUANTITIES},
            "mixing": None if mixing is None else mixing.value,
            "scattering_length_source": answer.between.source or None,
            "caveats": [
                {
                    "id": caveat.id,
                    "severity": caveat.severity.value,
                    "text": mixture_caveat_text(caveat, answer.between, why=answer.reason),
                    "value": None if caveat.value is None or not math.isfinite(caveat.value) else caveat.value,
                }
                for caveat in answer.caveats
            ],
        },
    }


def _quantity(answer: MixtureAnswer, name: str) -> dict[str, Any]:
    row, value = MIXTURE_QUANTITIES[name], answer.value(name)
    entry: dict[str, Any] = {"value": value, "unit": row.unit, "low": None, "high": None}
    spread = answer.spreads.get(name)
    if not math.isfinite(value):
        entry |= {"value": None, "reason": reason_unknown(answer, name)}
    elif spread is not None:
        entry |= {"low": spread.low, "high": spread.high, "median": spread.median}
    return {**entry, "label": row.label, "source": row.source}


def mixture_text(answer: MixtureAnswer) -> str:
    """The two clouds together as a readable block."""
    first, second = answer.coolant.state, answer.state
    lines = [f"{first.key}, {first.name}, with the passenger {second.key}, {second.name}"]
    lines += ["", *columns(mixture_rows(answer), indent=2)]
    mixing = mixing_text(None if answer.mixture is None else answer.mixture.mixing)
    if mixing:
        lines += ["", f"Two condensates of these: {mixing}"]
    caveats = mixture_caveat_lines(answer)
    if caveats:
        lines += ["", "What this answer does not cover"]
        lines += [f"  {line.sign} {line.word}: {line.sentence}" for line in caveats]
    return "\n".join(lines)
