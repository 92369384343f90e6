"""Any plan, made up at random, is read back as it was written, and saved over any other."""

from __future__ import annotations

from hypothesis import given, settings
from hypothesis import strategies as st

from app.plan import (
    Plan,
    parse_plan,
    plan_with,
    write_plan,
)
from physics.cloud import AVAILABLE_MODELS


def number_texts(low: int, high: int) -> st.SearchStrategy[str]:
    body = st.integers(low, high).map(str)
    return st.one_of(body, st.tuples(body, st.integers(1, 9)).map(lambda pair: f"{pair[0]}({pair[1]})"))


@st.composite
def plans(draw: st.DrawFn) -> Plan:
    def optional(texts: st.SearchStrategy[str]) -> str:
        return draw(st.one_of(st.just(""), texts))

    frequency = st.tuples(number_texts(1, 9999), st.sampled_from(["Hz", "kHz"])).map(" ".join)
    collisions = draw(st.sampled_from(["", "species.scattering_length", "species.field"]))
    target = draw(
        st.sampled_from(
            ["", "target.reduced_temperature", "target.condensate_atoms", "target.peak_phase_space_density"]
        )
    )
    printable = st.characters(codec="utf-8").filter(str.isprintable)
    texts = {
        "title": draw(st.text(printable, max_size=20)),
        "species.key": draw(st.sampled_from(["87Rb", "41K", "6Li", "4He_metastable"])),
        "species.spin_components": optional(st.sampled_from(["1", "2"])),
        "trap.frequencies": ",".join(draw(st.lists(frequency, min_size=3, max_size=3))),
        "trap.depth": optional(number_texts(1, 900).map(lambda t: t + " uK")),
        "cloud.atoms": draw(number_texts(1, 10**9)),
        "cloud.temperature": draw(number_texts(1, 9000)) + draw(st.sampled_from([" nK", " µK", " kHz"])),
        "cloud.model": optional(st.sampled_from([model.value for model in AVAILABLE_MODELS])),
        "losses.background_lifetime": optional(number_texts(1, 900).map(lambda t: t + " s")),
        "losses.three_body": optional(number_texts(1, 99).map(lambda t: t + "e-30 cm^6/s")),
        "losses.heating": optional(number_texts(1, 900).map(lambda t: t + " nK/s")),
        "target.efficiency": optional(number_texts(1, 5)),
    }
    if collisions:
        texts[collisions] = draw(number_texts(1, 500)) + (" a0" if collisions.endswith("length") else " G")
    if target:
        texts[target] = draw(number_texts(1, 1000))
    return plan_with(None, texts)


@settings(deadline=None)
@given(plan=plans())
def test_a_written_plan_is_read_back_as_it_was(plan: Plan) -> None:
    text = write_plan(plan)
    again = parse_plan(text, "a.toml")
    assert again == plan
    assert write_plan(again) == text


@settings(deadline=None)
@given(before=plans(), after=plans())
def test_any_plan_can_be_saved_over_any_other(before: Plan, after: Plan) -> None:
    written = write_plan(after, write_plan(before))
    assert parse_plan(written, "a.toml") == after
