"""The species data: complete, sourced, consistent with independent tables; and the ways of writing their names."""

from __future__ import annotations

import re
import subprocess
import sys
from decimal import Decimal
from fractions import Fraction
from pathlib import Path

import periodictable
import pytest
from hypothesis import given
from hypothesis import strategies as st

from physics.constants import atomic_mass, bohr_magneton, bohr_radius
from physics.particles import Certainty, Statistics
from physics.species import PRESETS, PresetError, Sourced, Species, State, load_species, species_keys
from physics.species_file import ISOTOPE_NUMBERS, STATE_NUMBERS, read_species

ALL = [load_species(key) for key in species_keys()]
STATES = [pytest.param(state, id=f"{state.key} {state.name}") for species in ALL for state in species.states]
SPECIES = [pytest.param(species, id=species.key) for species in ALL]


def numbers_of(holder: object, names: object) -> dict[str, Sourced]:
    found = {name: getattr(holder, name) for name in names}  # type: ignore[attr-defined]
    return {name: number for name, number in found.items() if number is not None}


def column_sum(name: str) -> tuple[int, Decimal]:
    texts = [n.text.split()[0] for s in ALL if (n := getattr(s.isotope, name)) is not None]
    return len(texts), sum(map(Decimal, texts), Decimal(0))


# ---- the data -------------------------------------------------------------------------------------------------------


def test_all_species_load_in_order_of_mass_number() -> None:
    keys = species_keys()
    assert len(keys) == 32
    numbers = [species.isotope.mass_number for species in ALL]
    assert numbers == sorted(numbers)
    assert keys[:4] == ("1H", "3He_metastable", "4He_metastable", "6Li")
    assert not [key for key in keys if "*" in key]


@pytest.mark.parametrize(
    ("name", "count", "total"),
    [
        # Sums over the columns of the hand-made table that the files were written from, one entry an isotope.
        ("mass", 32, "3146.280744562868"),
        ("imaging_wavelength", 32, "17320.369035"),
        ("imaging_linewidth", 32, "690.8126"),
        ("D1_wavelength", 9, "6726.600161"),
        ("D1_linewidth", 9, "55.4408"),
        ("D2_wavelength", 9, "6644.029135"),
        ("D2_linewidth", 9, "57.0026"),
        ("polarizability_1064", 31, "-8138.35"),
        ("nuclear_spin", 32, "35.0"),
    ],
)
def test_column_sums_of_the_isotopes(name: str, count: int, total: str) -> None:
    assert column_sum(name) == (count, Decimal(total))


def test_column_sums_of_the_usual_states() -> None:
    # Rows of the hand-made table: the first state of each isotope, and two states more.
    rows = [species.states[0] for species in ALL]
    rows += [load_species("7Li").state("F=2 mF=+2"), load_species("87Rb").state("F=2 mF=+2")]
    sums = {}
    for name in ("scattering_length", "two_body", "three_body"):
        texts = [number.text.split()[0] for state in rows if (number := getattr(state, name)) is not None]
        sums[name] = (len(texts), sum(map(Decimal, texts), Decimal(0)))
    assert sums == {
        "scattering_length": (30, Decimal("2837.54")),
        "two_body": (3, Decimal("3.16e-14")),
        "three_body": (10, Decimal("1.0078766e-24")),
    }


@pytest.mark.parametrize("species", SPECIES)
def test_every_number_has_a_source_and_a_certainty(species: Species) -> None:
    found = list(numbers_of(species.isotope, ISOTOPE_NUMBERS).values())
    for state in species.states:
        found += numbers_of(state, STATE_NUMBERS).values()
    # Counted in the file itself, so that nothing is dropped on the way.
    raw = (PRESETS / f"{species.key}.toml").read_text(encoding="utf-8")
    assert len(found) == raw.count("\nvalue = ") == raw.count("\nsource = ") == raw.count("\ncertainty = ")
    for number in found:
        assert len(number.source) > 3
        assert isinstance(number.certainty, Certainty)
        assert "|" not in number.source.replace("|gF mF|", "").replace("gJ |mJ|", "")


@pytest.mark.parametrize("species", SPECIES)
def test_files_are_plain_ascii(species: Species) -> None:
    (PRESETS / f"{species.key}.toml").read_bytes().decode("ascii")


@pytest.mark.parametrize("species", SPECIES)
def test_mass_agrees_with_the_general_library(species: Species) -> None:
    # periodictable 2 has the AME2020 masses rounded to at most 8 decimals or so.
    isotope = species.isotope
    listed = getattr(periodictable, isotope.element)[isotope.mass_number].mass
    assert isotope.mass.value / atomic_mass == pytest.approx(listed, abs=6e-8)


@pytest.mark.parametrize("species", SPECIES)
def test_statistics_follow_from_the_number_of_neutrons(species: Species) -> None:
    # A neutral atom has as many electrons as protons: it is a boson if its number of neutrons is even.
    isotope = species.isotope
    neutrons = isotope.mass_number - getattr(periodictable, isotope.element).number
    expected = Statistics.BOSE if neutrons % 2 == 0 else Statistics.FERMI
    assert isotope.statistics is expected
    assert (isotope.nuclear_spin.value % 1.0 == 0.5) == (isotope.mass_number % 2 == 1)


@pytest.mark.parametrize("species", [s for s in SPECIES if s.values[0].isotope.gJ is not None])
def test_electronic_g_factors_are_near_those_of_pure_ls_coupling(species: Species) -> None:
    # Lande factor of the ground term with g_S = 2.002319; heavy atoms are off by less than 1 percent.
    isotope = species.isotope
    letters = re.search(r"(\d)([SPDFGHI])(\d+)(/2)?", isotope.ground_term)
    assert letters
    S, L = (int(letters[1]) - 1) / 2, "SPDFGHI".index(letters[2])
    J = int(letters[3]) / (2 if letters[4] else 1)
    assert isotope.J == J
    JJ, SS, LL = J * (J + 1), S * (S + 1), L * (L + 1)
    lande = (JJ - SS + LL) / (2 * JJ) + 2.00231930436 * (JJ + SS - LL) / (2 * JJ)
    assert isotope.gJ is not None
    assert isotope.gJ.value == pytest.approx(lande, rel=1e-2 if L else 3e-4)


@pytest.mark.parametrize("state", [s for s in STATES if s.values[0].gF is not None and s.values[0].isotope.gJ])
def test_g_factor_of_a_hyperfine_state_follows_lande(state: State) -> None:
    isotope, F = state.isotope, state.F
    assert F is not None
    assert isotope.gJ is not None
    assert state.gF is not None
    J, I = isotope.J, isotope.nuclear_spin.value  # noqa: E741
    lande = isotope.gJ.value * (F * (F + 1) + J * (J + 1) - I * (I + 1)) / (2 * F * (F + 1))
    assert state.gF.value == pytest.approx(lande, rel=1e-7)


@pytest.mark.parametrize(
    ("key", "moment"),
    [
        # Nuclear moments in nuclear magnetons: N. J. Stone, At. Data Nucl. Data Tables 90, 75 (2005) (from memory).
        ("87Sr", -1.0936),
        ("171Yb", 0.4937),
        ("173Yb", -0.6799),
    ],
)
def test_g_factor_of_a_nuclear_spin_state_follows_the_nuclear_moment(key: str, moment: float) -> None:
    state = load_species(key).states[0]
    assert state.gF is not None
    # Energy -mu B: a positive moment makes mF > 0 a high-field seeker. One nuclear magneton is muB/1836.15.
    expected = -moment / state.isotope.nuclear_spin.value / 1836.15267
    assert state.gF.value == pytest.approx(expected, rel=5e-3)


@pytest.mark.parametrize("state", STATES)
def test_zeeman_slope_is_g_times_m_and_the_moment_its_magnitude(state: State) -> None:
    if state.mF is not None:
        assert state.gF is not None
        expected = state.gF.value * state.mF * bohr_magneton
    elif state.mJ is not None:
        assert state.isotope.gJ is not None
        expected = state.isotope.gJ.value * state.mJ * bohr_magneton
    elif state.spin_components == 1:
        expected = 0.0
    else:
        assert state.zeeman_slope is None  # the components have their own
        assert state.magnetic_moment is None
        return
    assert state.zeeman_slope is not None
    assert state.magnetic_moment is not None
    # Six digits are printed, four for nuclear moments.
    rel = 2e-4 if abs(expected) < 1e-3 * bohr_magneton else 2e-6
    assert state.zeeman_slope.value == pytest.approx(expected, rel=rel)
    assert state.magnetic_moment.value == pytest.approx(abs(expected), rel=rel)


@pytest.mark.parametrize("state", STATES)
def test_quantum_numbers_fit_the_name_and_the_isotope(state: State) -> None:
    I, J = state.isotope.nuclear_spin.value, state.isotope.J  # noqa: E741
    if state.F is not None:
        assert abs(I - J) <= state.F <= I + J
        assert (I + J - state.F) % 1 == 0
    if state.mJ is not None:
        assert I == 0
        assert abs(state.mJ) <= J
    if state.mF is not None:
        numbers = re.fullmatch(r"F=(\S+) mF=(\S+)", state.name)
        assert numbers
        assert (float(Fraction(numbers[1])), float(Fraction(numbers[2]))) == (state.F, state.mF)
    if state.spin_components > 2:
        assert state.spin_components == 2 * I + 1  # alkaline earths: all nuclear spin states


@pytest.mark.parametrize(
    ("key", "nanometres"),
    [
        # Abstract of Kitagawa et al., Phys. Rev. A 77, 012719 (2008); 4He*: Moal et al., Phys. Rev. Lett. 96, 023203.
        ("168Yb", 13.33),
        ("170Yb", 3.38),
        ("171Yb", -0.15),
        ("173Yb", 10.55),
        ("174Yb", 5.55),
        ("176Yb", -1.28),
        ("4He_metastable", 7.512),
    ],
)
def test_scattering_lengths_published_in_nanometres(key: str, nanometres: float) -> None:
    state = load_species(key).state()
    assert state.scattering_length is not None
    assert state.scattering_length.value == pytest.approx(nanometres * 1e-9, abs=0.05 * bohr_radius)


def test_background_lengths_are_marked() -> None:
    marked = {state.key for species in ALL for state in species.states if state.scattering_length_is_background}
    assert marked == {"6Li", "7Li", "39K", "85Rb", "133Cs"}


def test_single_fermion_states_are_polarised_and_mixtures_are_not() -> None:
    lithium = load_species("6Li")
    assert not lithium.state().polarised
    assert lithium.state().spin_components == 2
    assert [part.name for part in lithium.components_of(lithium.state())] == ["F=1/2 mF=+1/2", "F=1/2 mF=-1/2"]
    assert all(part.polarised for part in lithium.components_of(lithium.state()))
    assert load_species("161Dy").state().polarised
    assert not load_species("162Dy").state().polarised
    assert load_species("87Sr").state().spin_components == 10
    assert load_species("173Yb").state().spin_components == 6


def test_units_become_si() -> None:
    state = load_species("87Rb").state("F=2 mF=2")
    assert state.mass == pytest.approx(86.909180529 * 1.66053906892e-27, rel=1e-15)
    assert state.scattering_length is not None
    assert state.scattering_length.value == pytest.approx(98.98 * 5.29177210544e-11, rel=1e-14)
    assert state.three_body is not None
    assert state.three_body.value == pytest.approx(1.08e-40, rel=1e-14)
    assert state.three_body.text == "1.08e-28 cm^6/s"
    wavelength = state.isotope.D2_wavelength
    assert wavelength is not None
    assert wavelength.value == pytest.approx(780.24121e-9, rel=1e-14)


# ---- names ----------------------------------------------------------------------------------------------------------


@pytest.mark.parametrize(
    ("written", "key"),
    [
        ("87Rb", "87Rb"), ("87rb", "87Rb"), ("Rb87", "87Rb"), ("rb-87", "87Rb"), (" 87 Rb ", "87Rb"),
        ("4He*", "4He_metastable"), ("4HE_METASTABLE", "4He_metastable"), ("he4*", "4He_metastable"),
        ("3he*", "3He_metastable"),
    ],
)  # fmt: skip
def test_keys_may_be_written_in_several_ways(written: str, key: str) -> None:
    assert load_species(written).key == key


@pytest.mark.parametrize(
    ("written", "sentence"),
    [
        ("88Rb", 'no species "88Rb" in the data; the nearest are 85Rb, 87Rb'),
        ("Rb", 'no species "Rb" in the data; the nearest are 85Rb, 87Rb'),
        ("4He", 'no species "4He" in the data; the nearest are 4He_metastable, 3He_metastable'),
        ("22Na", 'no species "22Na" in the data; the nearest is 23Na'),
        ("../87Rb", 'no species "../87Rb" in the data; the nearest are 87Rb, 85Rb'),
        ("", 'no species "" in the data; the nearest are '),
    ],
)
def test_an_unknown_key_is_answered_with_the_nearest(written: str, sentence: str) -> None:
    with pytest.raises(ValueError, match="^" + re.escape(sentence)):
        load_species(written)


def test_an_unknown_state_is_answered_with_the_allowed_ones() -> None:
    sentence = '87Rb has no state "F=2 mF=-2"; its states are "F=2 mF=+2", '
    with pytest.raises(ValueError, match="^" + re.escape(sentence)):
        load_species("87Rb").state("F=2 mF=-2")


def test_no_name_or_an_empty_one_gives_the_usual_state() -> None:
    rubidium = load_species("87Rb")
    assert rubidium.state() is rubidium.state("") is rubidium.state(" ") is rubidium.states[0]
    assert rubidium.state().name == "F=1 mF=-1"


SINGLE = [state for species in ALL for state in species.states if state.mF is not None]


@st.composite
def spelt_level(draw: st.DrawFn, state: State) -> str:
    """Some way in which a person may write the quantum numbers of a single hyperfine state."""
    assert state.F is not None
    assert state.mF is not None

    def number(value: float, sign: bool) -> str:
        size = draw(st.sampled_from([str(Fraction(abs(value))), f"{abs(value):g}"]))
        plus = draw(st.sampled_from(["", "+"])) if sign else ""
        return (draw(st.sampled_from(["-", "−"])) if value < 0 else plus) + size

    blank = st.sampled_from(["", " ", "  "])
    f_word = draw(st.sampled_from(["", "F=", "f=", "F = "]))
    m_word = draw(st.sampled_from(["mF=", "mf=", "MF =", "m_F=", "m="] if f_word else ["", "mF="]))
    between = (
        draw(st.sampled_from([" ", ", ", ",", "  "])) if not m_word else draw(st.sampled_from(["", " ", ",", " , "]))
    )
    text = f"{f_word}{number(state.F, False)}{between}{m_word}{draw(blank)}{number(state.mF, True)}"
    return draw(blank) + draw(st.sampled_from([text, f"|{text}>", f"|{text}⟩"])) + draw(blank)


@given(data=st.data())
def test_a_single_state_is_found_however_it_is_written(data: st.DataObject) -> None:
    state = data.draw(st.sampled_from(SINGLE))
    written = data.draw(spelt_level(state))
    assert load_species(state.key).state(written) is state


MIXTURES = [state for species in ALL for state in species.states if state.components]


@given(data=st.data())
def test_a_mixture_is_found_in_either_order(data: st.DataObject) -> None:
    mixture = data.draw(st.sampled_from(MIXTURES))
    species = load_species(mixture.key)
    parts = data.draw(st.permutations(species.components_of(mixture)))
    written = [data.draw(spelt_level(part)) for part in parts]
    start = data.draw(st.sampled_from(["", "equal mixture of ", "a mix of ", "Mixture of "]))
    assert species.state(start + data.draw(st.sampled_from([" and ", " & ", "&", " AND "])).join(written)) is mixture


@given(text=st.text(max_size=30), key=st.sampled_from(species_keys()))
def test_any_text_is_a_state_or_an_error_that_names_the_species(text: str, key: str) -> None:
    species = load_species(key)
    answer: object
    try:
        answer = species.state(text)
    except ValueError as error:
        answer = str(error)
    assert answer in species.states or str(answer).startswith(f"{key} has no state")


@pytest.mark.parametrize("state", STATES)
def test_states_are_told_apart(state: State) -> None:
    species = load_species(state.key)
    for name in (state.name, state.name.upper(), state.name.replace(" mF", "mF"), *state.also):
        assert species.state(name) is state


# ---- bad files ------------------------------------------------------------------------------------------------------

GOOD = (PRESETS / "87Rb.toml").read_text(encoding="utf-8")


def bad_file(folder: Path, old: str, new: str) -> Path:
    assert old in GOOD
    path = folder / "87Rb.toml"
    path.write_text(GOOD.replace(old, new, 1), encoding="utf-8")
    return path


@pytest.mark.parametrize(
    ("old", "new", "sentence"),
    [
        ('key = "87Rb"', 'key = "86Rb"', '87Rb.toml: key must be the name of the file, "87Rb", got "86Rb"'),
        ('key = "87Rb"', "key = ", "87Rb.toml is not a readable TOML file: "),
        ("mass_number", "mass_nunber", '87Rb.toml: mass_nunber is not a known key; the nearest is "mass_number"'),
        ("J = 0.5", "J = 0.4", "87Rb.toml: J must be 0, 1/2, 1, ..., got 0.4"),
        ("J = 0.5", "J = true", "87Rb.toml: J must be a number, got True"),
        ("[mass]", "[gJ]", "87Rb.toml is not a readable TOML file: "),
        ('statistics = "boson"', 'statistics = "anyon"', "statistics must be \"boson\" or \"fermion\", got 'anyon'"),
        ("86.909180529 u", "86.909180529 kg", 'mass.value must be a number with unit u, got "86.909180529 kg"'),
        ("86.909180529 u", "nan u", '87Rb.toml: mass.value must be a number with unit u, got "nan u"'),
        ("86.909180529 u", "-86 u", "87Rb.toml: mass must be positive, got -86 u"),
        ('certainty = "seen"', 'certainty = "sure"', 'mass.certainty must be one of "seen", "memory", "computed"'),
        ("mF = -1.0", "mF = -2.0", '87Rb.toml: state "F=1 mF=-1": mF must be one of -F, -F+1, ... F'),
        ("mF = -1.0", "", '87Rb.toml: state "F=1 mF=-1": '),
        ('name = "F=2 mF=+2"', 'name = "F=1 mF=-1"', "87Rb.toml: state names must differ, got 'F=1 mF=-1' twice"),
        ("100.4 a0", "100,4 a0", '87Rb.toml: state "F=1 mF=-1": scattering_length.value must be a number with unit a0'),
        ('statistics = "boson"', 'statistics = "fermion"', 'state "F=1 mF=-1": scattering_length must be absent'),
        ("mF = -1.0", 'mF = -1.0\nspin_components = 2\ncomponents = ["F=1 mF=-1"]', "components must name 2 states"),
        ("mF = -1.0", 'mF = -1.0\nspin_components = 2\ncomponents = ["a", "F=2 mF=+2"]', "of the same file, got 'a'"),
    ],
)  # fmt: skip
def test_a_bad_file_is_answered_with_file_and_key(tmp_path: Path, old: str, new: str, sentence: str) -> None:
    if new == "":
        new, sentence = "mF = 'minus one'", sentence + "mF must be a number, got 'minus one'"
    with pytest.raises(PresetError, match=re.escape(sentence)) as caught:
        read_species(bad_file(tmp_path, old, new))
    assert str(caught.value).startswith("87Rb.toml")
    assert "\n" not in str(caught.value)


def test_a_missing_number_is_named(tmp_path: Path) -> None:
    start = GOOD.index("[mass]")
    stop = GOOD.index("[nuclear_spin]")
    with pytest.raises(PresetError, match=r"^87Rb\.toml: mass is missing$"):
        read_species(bad_file(tmp_path, GOOD[start:stop], ""))


# ---- cost -----------------------------------------------------------------------------------------------------------


def test_loading_needs_no_array_library() -> None:
    code = "import sys; from physics.species import load_species; load_species('87Rb'); print('numpy' in sys.modules)"
    answer = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, check=True, cwd=PRESETS.parents[1]
    )
    assert answer.stdout.strip() == "False"
