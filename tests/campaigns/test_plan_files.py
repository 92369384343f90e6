"""Damaged plan files are read, or refused in one printable sentence, soon; what is read can be changed and saved."""

from __future__ import annotations

import os
import random
import time
from dataclasses import replace
from pathlib import Path

import pytest

from app.plan import Plan, PlanError, parse_plan, plan_with, write_plan

LONG = os.environ.get("COLDWARD_LONG") == "1"
FILES = 10_000 if LONG else 100
SEED = 20_270_116
LONGEST_MESSAGE = 1000
PATIENCE = 10.0  # s for one file, which takes 20 ms or so: longer is a hang
ROOT = Path(__file__).resolve().parents[2]
WHOLE = tuple(
    path.read_text(encoding="utf-8")
    for folder in (ROOT / "presets" / "plans", ROOT / "presets" / "traps", ROOT / "tests" / "data")
    for path in sorted(folder.glob("*.toml"))
)
VALUES = (
    "nan", "inf", "-inf", "1e400", "1e-400", "-0", "1_000", "1__0", "0x7fffffffffffffffffffff", 5000 * "9", "true",
    '"nan nK"', '"inf"', '"-0 nK"', '"1e999 nK"', '"1e300 nK"', '"1e-30 Hz"', '"1e5e5"', '"(1±1)e5"', '"100 ± nan nK"',
    '"2pi x 2pi x 120 Hz"', '"200(1) nK"', '"1,5 nK"', '"1 000 nK"', '"1_000"', '"50 %"', '"5 ha0"', '"1 K/K/K"',
    '"1 m^999"', f'"1 {60 * "m*"}m"', f'"{5000 * "9"}"', f'"{100 * "("}"', '"\\u0000"', '"\\U0010FFFF"', '"\u202e"',
    '"２００ nK"', '"٣ nK"', '"½ nK"', '"200 nK\\n"', "'''a\nb'''", "[]", "{}", "{a = 1}", "[[[[]]]]", "[1, 2, 3]",
    '["1 Hz"]', '["120 Hz", "120 Hz", {}]', 2000 * "[" + 2000 * "]", 500 * "{a=" + "1" + 500 * "}",
    "1979-05-27", "1979-05-27T07:32:00Z", "07:32:00",
)  # fmt: skip
SECTIONS = (
    "[species]", "[trap]", "[cloud]", "[losses]", "[[trap]]", "[trap.coils]", "[[trap.beam]]", "[species.key]",
    "[a.b.c]", "[passenger.species]", "[[ramp.stage]]", "ramp = 3", "[target]", "title.x = 1", "[ramp]", "[limits]",
    "[[ramp.stage.move]]", "[ramp.stage.trap]", "[[limits.control]]", "[[measured]]", "[candidates]", "[[candidate]]",
    "title" + 2000 * ".a" + " = 1",
)  # fmt: skip
MARKS = ("\x00", '"', "[", "]", "{", "\u2028", "\ufeff", "é", "\r", "\\", "=", ".", "#", "1", "e", "\U0001f600")


def damaged(chance: random.Random, text: str) -> str:
    lines = text.split("\n")
    match chance.randrange(8):
        case 0:
            return text[: chance.randrange(len(text))]
        case 1:
            raw = bytearray(text.encode())
            for _ in range(chance.randint(1, 5)):
                raw[chance.randrange(len(raw))] = chance.randrange(256)
            return raw.decode("utf-8", "replace")
        case 2:
            lines.insert(chance.randrange(len(lines)), chance.choice(lines))
        case 3:
            chance.shuffle(lines)
        case 4:
            place = chance.randrange(len(text))
            return text[:place] + chance.choice(MARKS) * chance.randint(1, 3) + text[place:]
        case 5:
            lines.insert(chance.randrange(len(lines)), chance.choice(SECTIONS))
        case _:
            entries = [i for i, line in enumerate(lines) if "=" in line] or [0]
            for place in chance.choices(entries, k=chance.randint(1, 2)):
                lines[place] = f"{lines[place].split('=')[0]}= {chance.choice(VALUES)}"
    return "\n".join(lines)


CHANGES = {
    "title": ("", "äöü"),
    "cloud.temperature": ("123 nK",),
    "trap.frequencies": ("1 Hz, 2 Hz, 3 Hz",),
    "trap.depth": ("", "3 uK"),
    "losses.heating": ("", "3 nK/s"),
    "target.efficiency": ("", "3"),
}


TRAPS = tuple(parse_plan(text, "whole.toml").trap for text in WHOLE)


PARTS = tuple(parse_plan(text, "whole.toml") for text in WHOLE)


def shuffled(chance: random.Random, plan: Plan) -> Plan:
    """The plan with its stages in another order, without the first of them, and with another plan's other parts."""
    stages = [*plan.ramp]
    chance.shuffle(stages)
    other = chance.choice(PARTS)
    parts = {name: getattr(other, name) for name in chance.sample(("limits", "measured", "candidates", "passenger"), 2)}
    return replace(plan, ramp=(*stages[1:], *other.ramp[:1]), **parts)


def without_trap_sections(plan: Plan) -> Plan:
    """Beams beside frequencies are unused in a file and go where others take their place."""
    return replace(plan, unused=tuple(name for name in plan.unused if not name.startswith("trap.")))


def rearranged(chance: random.Random, plan: Plan) -> Plan:
    """The plan with its beams, if it has any, in another order, and the first of them off."""
    beams = [*plan.trap.beams]
    chance.shuffle(beams)
    beams[:1] = [replace(beam, on=not beam.on) for beam in beams[:1]]
    return replace(plan, trap=replace(plan.trap, beams=tuple(beams)))


@pytest.mark.long
@pytest.mark.timeout(1200)
def test_damaged_plans_are_refused_in_one_sentence_or_can_be_saved() -> None:
    chance = random.Random(SEED)
    read = 0
    for number in range(FILES):
        text = chance.choice(WHOLE)
        for _ in range(chance.randint(1, 2)):
            text = damaged(chance, text) if text else text
        began = time.monotonic()
        try:
            plan = parse_plan(text, "damaged.toml")
        except PlanError as error:
            sentence = str(error)
            assert sentence.startswith("damaged.toml"), (number, sentence)
            assert sentence.isprintable(), (number, sentence)
            assert len(sentence) < LONGEST_MESSAGE, (number, sentence)
        else:
            read += 1
            assert write_plan(plan) == text.removeprefix("\ufeff"), number
            harmonic = plan_with(plan, {path: chance.choice(texts) for path, texts in CHANGES.items()})
            other = chance.choice(TRAPS)
            for changed in (
                harmonic,
                replace(plan, trap=other, title="äöü"),
                rearranged(chance, plan),
                shuffled(chance, plan),
            ):
                again = parse_plan(write_plan(changed), "changed.toml")
                assert without_trap_sections(again) == without_trap_sections(changed), number
        assert time.monotonic() - began < PATIENCE, number
    assert read, "some damage leaves a plan that can be read"
