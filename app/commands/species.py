"""`coldward species`: which isotopes and states the data know, and every number with its source."""

from __future__ import annotations

import argparse
import json
from typing import TYPE_CHECKING, Any

from app import CONTRACT, __version__
from app.commands.trouble import fail

if TYPE_CHECKING:
    from physics.species import Isotope, Sourced, Species, State
    from physics.species_tables import Line, Pair, Resonance

_LABELS = {
    "mass": "mass",
    "nuclear_spin": "nuclear spin I",
    "gJ": "electronic g factor gJ",
    "imaging_wavelength": "imaging wavelength, vacuum",
    "imaging_linewidth": "imaging linewidth, Gamma/2pi",
    "D1_wavelength": "D1 wavelength, vacuum",
    "D1_linewidth": "D1 linewidth, Gamma/2pi",
    "D2_wavelength": "D2 wavelength, vacuum",
    "D2_linewidth": "D2 linewidth, Gamma/2pi",
    "polarizability_1064": "scalar polarizability, 1064 nm",
    "gF": "g factor gF",
    "magnetic_moment": "magnetic moment",
    "zeeman_slope": "Zeeman slope dE/dB, low field",
    "scattering_length": "scattering length",
    "two_body": "two-body rate K2, thermal",
    "three_body": "three-body rate K3, thermal",
}
_SI_UNITS = {
    "u": "kg", "1": "1", "nm": "m", "MHz": "Hz", "au": "C^2 m^2/J", "muB": "J/T", "a0": "m", "cm^3/s": "m^3/s",
    "cm^6/s": "m^6/s", "G": "T",
}  # fmt: skip


def add_parser(verbs: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """Add the verb to the command line."""
    parser = verbs.add_parser(
        "species",
        help="list isotopes and states, or show one with the source of every number",
        description="Without KEY: all isotopes and states. With KEY: every number of that isotope, its source, and "
        "how sure it is: seen in the source, recalled from it (memory), or computed from others.",
    )
    parser.add_argument("key", nargs="?", metavar="KEY", help="an isotope, e.g. 87Rb or 4He*")
    parser.add_argument("--json", action="store_true", help="print one JSON object, in SI units")
    parser.set_defaults(run=run)


def run(args: argparse.Namespace) -> int:
    """Print the list, or one species; 1 where the key is not known or a data file is bad."""
    from physics.species import load_species, species_keys

    try:
        chosen = [load_species(args.key)] if args.key else [load_species(key) for key in species_keys()]
        print(_json(args, chosen) if args.json else _details(chosen[0]) if args.key else _list(chosen))
    except ValueError as error:
        return fail(error)
    return 0


def _json(args: argparse.Namespace, chosen: list[Species]) -> str:
    opening = {"coldward": CONTRACT, "version": __version__, "input": {"key": args.key}}
    body = [_species_json(species, whole=args.key is not None) for species in chosen]
    return json.dumps({**opening, "species": body}, ensure_ascii=False, allow_nan=False)


def _list(chosen: list[Species]) -> str:
    from app.tables import text_table

    rows = []
    for species in chosen:
        for place, state in enumerate(species.states):
            isotope = species.isotope
            first = (species.key, isotope.statistics.value, isotope.mass.text) if place == 0 else ("", "", "")
            rows.append((*first, state.name, *_length_cells(state)))
    return "\n".join(
        [
            text_table(("species", "statistics", "mass", "state", "scattering length", "known from"), rows),
            "",
            "The first state of a species is the usual one. Known from: seen, read in the cited source; memory,",
            "recalled from it; computed, worked out. A background means something only with the resonances, at a",
            "given field.",
            "coldward species KEY shows every number of one species with its source.",
        ]
    )


def _length_cells(state: State) -> tuple[str, str]:
    if state.polarised:
        return "none: one spin state of fermions", ""
    if state.scattering_length is None:
        return "unknown", ""
    background = " (background)" if state.scattering_length_is_background else ""
    return state.scattering_length.text + background, state.scattering_length.certainty.value


def _details(species: Species) -> str:
    from physics.scattering import pairs_of, resonances_of, resonances_with_others
    from physics.species_tables import load_lines

    isotope = species.isotope
    blocks = [
        f"{isotope.key}: {isotope.statistics.value}, ground term {isotope.ground_term}, "
        f"imaging on {isotope.imaging_transition}",
        _numbers(isotope),
    ]
    if isotope.note:
        blocks.append(isotope.note)
    blocks += [_state_text(state) for state in species.states]
    own = [resonance for state in species.states for resonance in resonances_of(state)]
    for title, resonances in (("Resonances", own), ("Resonances with others", resonances_with_others(species.key))):
        if resonances:
            blocks.append(f"{title}: a(B) = abg (1 - Delta/(B - B0))\n{_resonance_table(resonances)}")
    if pairs := pairs_of(species.key):
        blocks.append(f"Scattering lengths with others, low field\n{_pair_table(pairs)}")
    if lines := load_lines(isotope.element):
        blocks.append(f"Terms of the polarizability of {isotope.element}\n{_line_table(lines)}")
    return "\n\n".join(blocks)


def _state_text(state: State) -> str:
    from physics.scattering import tuning

    kind = f", equal mixture of {state.spin_components} spin states" if state.spin_components > 1 else ""
    parts = [f'State "{state.name}"{kind}']
    if table := _numbers(state):
        parts.append(table)
    if state.polarised:
        parts.append("no s-wave scattering: fermions in one spin state")
    if state.scattering_length_is_background:
        parts.append("the scattering length is a background, to be used with the resonances at a given field")
    parts += [
        f"from {1e4 * form.low:g} to {1e4 * form.high:g} G: the resonances at "
        f"{', '.join(r.position.text for r in form.resonances)}" + (f" ({form.note})" if form.note else "")
        for form in tuning(state)
    ]
    parts += [note for note in (state.scattering_note, state.loss_note, state.note) if note]
    return "\n".join(parts)


def _sourced(holder: Isotope | State) -> dict[str, Sourced]:
    found = {name: getattr(holder, name, None) for name in _LABELS}
    # The mass of a state is a plain number: it belongs to the isotope.
    return {name: number for name, number in found.items() if number is not None and not isinstance(number, float)}


def _numbers(holder: Isotope | State) -> str:
    from app.tables import text_table

    rows = [
        (_LABELS[name], number.text, number.certainty.value, _cited(number))
        for name, number in _sourced(holder).items()
    ]
    return text_table(("quantity", "value", "known from", "source"), rows) if rows else ""


def _cited(number: Sourced) -> str:
    return f"{number.source} [{number.note}]" if number.note else number.source


def _resonance_table(resonances: tuple[Resonance, ...] | list[Resonance]) -> str:
    from app.tables import text_table

    rows = [
        (
            _partners(resonance),
            *(cell for number in (resonance.position, resonance.width, resonance.background)
              for cell in (number.text, number.certainty.value)),
            "yes" if resonance.form else "no",
            f"{resonance.position.source} [{resonance.note}]" if resonance.note else resonance.position.source,
        )
        for resonance in resonances
    ]  # fmt: skip
    header = ("states", "B0", "known from", "Delta", "known from", "abg", "known from", "used", "source")
    return text_table(header, rows)


def _pair_table(pairs: tuple[Pair, ...]) -> str:
    from app.tables import text_table

    rows = [
        (
            _partners(pair),
            pair.scattering_length.text,
            _spread(pair.uncertainty),
            pair.scattering_length.certainty.value,
            _cited(pair.scattering_length),
        )
        for pair in pairs
    ]
    return text_table(("states", "a", "uncertainty", "known from", "source"), rows)


def _spread(uncertainty: str) -> str:
    return f"{uncertainty} a0" if uncertainty else "unknown"


def _partners(between: Resonance | Pair) -> str:
    return " + ".join(f"{key} {state}" for key, state in (between.first, between.second))


def _line_table(lines: tuple[Line, ...]) -> str:
    from app.tables import text_table

    rows = []
    for line in lines:
        number = line.constant or line.oscillator_strength
        rows.append(
            (
                line.transition,
                line.wavelength.text if line.wavelength else "",
                line.wavelength.certainty.value if line.wavelength else "",
                f"f = {number.text}"
                if number is line.oscillator_strength and number
                else number.text
                if number
                else "",
                number.certainty.value if number else "",
                "; ".join(dict.fromkeys(item.source for item in (line.wavelength, number) if item)),
            )
        )
    return text_table(("transition", "wavelength", "known from", "strength", "known from", "source"), rows)


def _species_json(species: Species, *, whole: bool) -> dict[str, Any]:
    isotope = species.isotope
    answer: dict[str, Any] = {
        "key": isotope.key,
        "element": isotope.element,
        "mass_number": isotope.mass_number,
        "statistics": isotope.statistics.value,
        "ground_term": isotope.ground_term,
        "imaging_transition": isotope.imaging_transition,
        "quantities": {name: _number_json(number) for name, number in _sourced(isotope).items()},
        "states": [_state_json(state) for state in species.states],
    }
    if whole:
        answer |= _tables_json(species)
    return answer


def _state_json(state: State) -> dict[str, Any]:
    return {
        "name": state.name,
        "F": state.F,
        "mF": state.mF,
        "mJ": state.mJ,
        "spin_components": state.spin_components,
        "components": list(state.components),
        "polarised": state.polarised,
        "scattering_length_is_background": state.scattering_length_is_background,
        "quantities": {name: _number_json(number) for name, number in _sourced(state).items()},
        "notes": [note for note in (state.scattering_note, state.loss_note, state.note) if note],
    }


def _tables_json(species: Species) -> dict[str, Any]:
    from physics.scattering import pairs_of, resonances_of, resonances_with_others
    from physics.species_tables import load_lines

    own = [resonance for state in species.states for resonance in resonances_of(state)]
    return {
        "resonances": [
            {
                "states": [list(resonance.first), list(resonance.second)],
                "position": _number_json(resonance.position),
                "width": _number_json(resonance.width),
                "background": _number_json(resonance.background),
                "used": resonance.form is not None,
                "note": resonance.note,
            }
            for resonance in (*own, *resonances_with_others(species.key))
        ],
        "pairs": [
            {
                "states": [list(pair.first), list(pair.second)],
                "scattering_length": _number_json(pair.scattering_length),
                "uncertainty": _spread(pair.uncertainty),
            }
            for pair in pairs_of(species.key)
        ],
        "lines": [
            {
                "transition": line.transition,
                "wavelength": _number_json(line.wavelength),
                "oscillator_strength": _number_json(line.oscillator_strength),
                "constant": _number_json(line.constant),
                "note": line.note,
            }
            for line in load_lines(species.isotope.element)
        ],
    }


def _number_json(number: Sourced | None) -> dict[str, Any] | None:
    if number is None:
        return None
    _, _, unit = number.text.partition(" ")
    return {
        "value": number.value,
        "unit": _SI_UNITS[unit or "1"],
        "text": number.text,
        "certainty": number.certainty.value,
        "source": number.source,
        "note": number.note,
    }
