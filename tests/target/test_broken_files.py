"""Broken target files: what is wrong, where, and how to mend it."""

from __future__ import annotations

from collections.abc import Callable

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from exptime.errors import InputError, OutOfRangeError, UnitsError
from exptime.target.reader import read_target_text
from exptime.target.records import Target
from tests.target.conftest import DRAWN, Changes, document

Reader = Callable[..., Target]
FLUX = "{{value: {}, band: {}, absorbed: true}}"
FRACTION = "{{value: {}, uncertainty: {}, definition: {}, band: 0.5-2 keV}}"
SPOT = "[{{colatitude: {}, longitude: 0 deg, angular_radius: {}, temperature: 0.1 keV}}]"
ONE_HARMONIC = "{number: 2, fraction: 0.1, uncertainty: 0.02}"

SYNTAX = [
    ("name: [open\n", "this is not valid YAML"),
    ("name: a\n\tspin_frequency: 250 Hz\n", "a tab"),
    ("name: a: b\n", "this is not valid YAML"),
    ("name: &a b\n", "anchors and aliases"),
    ("name: !!str b\n", "the tag"),
    ("", "empty"),
    ("- name\n", "no keys"),
    ("flux: " + "[" * 3000, "20 levels"),
    ("name: " + "x" * 1_100_000, "larger than 1 MB"),
]

UNITS: list[tuple[Changes, str, str, str]] = [
    ({"spin_frequency": "250"}, "spin_frequency", "no unit", "250 Hz"),
    ({"spin_frequency": "250 km"}, "spin_frequency", "a length, not a frequency", "250 Hz"),
    ({"distance": "400"}, "distance", "no unit", "350 pc"),
    ({"distance": "400 keV"}, "distance", "an energy, not a length", "350 pc"),
    ({"flux": FLUX.format("4e-13", "0.5-2 keV")}, "flux.value", "no unit", "erg s-1 cm-2"),
    ({"flux": FLUX.format("4e-13 erg", "0.5-2 keV")}, "flux.value", "an energy", "erg s-1 cm-2"),
    ({"flux": FLUX.format("4e-13 erg s-1 cm-2", "0.5-2")}, "flux.band", "no unit", "keV"),
    ({"column_density": "1e20"}, "column_density", "no unit", "1.0e20 cm-2"),
    ({"temperature": "{value: 0.1 kev, frame: surface}"}, "temperature.value", "known", "keV"),
    ({"mass": "{value: 1.4 Msun, uncertainty: 0.1}"}, "mass.uncertainty", "no unit", "5 %"),
    ({"inclination": "60"}, "inclination", "no unit", "60 deg"),
]

RANGES: list[tuple[Changes, str, str, str]] = [
    ({"spin_frequency": "900 Hz"}, "spin_frequency", "out of range", "0.01 to 750 Hz"),
    ({"spin_frequency": "0 Hz"}, "spin_frequency", "out of range", "0.01 to 750 Hz"),
    ({"distance": "-4 pc"}, "distance", "out of range", "1 to 2e+06 pc"),
    ({"mass": "14 Msun"}, "mass", "out of range", "0.5 to 3 Msun"),
    ({"mass": "2.9 Msun"}, "mass", "too compact", "radius was not given"),
    ({"mass": "2.0 Msun", "radius": "10 km"}, "radius", "too compact", "Change mass"),
    ({"mass": "1.2 Msun", "radius": "16 km", "spin_frequency": "700 Hz"}, "radius", "break-up", ""),
    ({"mass": "2.1 Msun", "radius": "12.5 km", "spin_frequency": "740 Hz"}, "radius", "flat", ""),
    ({"flux": FLUX.format("-1 erg s-1 cm-2", "0.5-2 keV")}, "flux.value", "out of range", "1e-20"),
    ({"flux": FLUX.format("4e-13 erg s-1 cm-2", "2-0.5 keV")}, "flux.band", "not rise", "first"),
    ({"flux": FLUX.format("4e-13 erg s-1 cm-2", "1-500 keV")}, "flux.band", "out of range", "80"),
    ({"pulsed_fraction": FRACTION.format("1.2", "5 %", "peak-to-trough")}, "", "out of", "up to 1"),
    ({"pulsed_fraction": FRACTION.format("2.1", "5 %", "first-harmonic")}, "", "out of", "to 2"),
    ({"pulsed_fraction": FRACTION.format("0", "0.1", "rms")}, "", "out of range", "above 0"),
    ({"pulsed_fraction": FRACTION.format("0.5", "0", "rms")}, "", "out of range", "above 0"),
    ({"temperature": "{value: 120 keV, frame: surface}"}, "temperature.value", "out of", "10 keV"),
    ({"column_density": "-1e20 cm-2"}, "column_density", "out of range", "0 to 1e+25 cm-2"),
    ({"inclination": "200 deg"}, "inclination", "out of range", "0 to 180 deg"),
    (
        {"emission": "{model: limb-darkened, coefficient: -2}"},
        "emission.coefficient",
        "out",
        "-0.9",
    ),
    ({"mass": "{value: 1.4 Msun, uncertainty: -0.1 Msun}"}, "mass.uncertainty", "out of", "0 Msun"),
]

KEYS: list[tuple[Changes, str, str, str]] = [
    ({"distanse": "4 pc", "distance": "4 pc"}, "distanse", "unknown key", "mean distance?"),
    ({"spin-frequency": "4 Hz"}, "spin-frequency", "unknown key", "mean spin_frequency?"),
    ({"spin_period": "4 ms"}, "spin_period", "both spin_frequency and spin_period", "Remove"),
    ({"spin_frequency": None}, "spin_frequency", "the spin is missing", "spin_period: 4.0 ms"),
    ({"name": None}, "name", "this key is missing", "name: Candidate A"),
    ({"flux": None}, "flux", "this key is missing", "or give hot_spots"),
    ({"flux": "{value: 4e-13 erg s-1 cm-2, band: 1-2 keV}"}, "flux.absorbed", "missing", "true"),
    ({"pulsed_fraction": "{value: 0.5, band: 1-2 keV}"}, "pulsed_fraction.definition", "mis", ""),
    ({"pulsed_fraction": "[]"}, "pulsed_fraction", "list is empty", "at least one"),
    ({"pulse_shape": "[]"}, "pulse_shape", "list is empty", "at least one"),
    ({"temperature": "0.1 keV"}, "temperature.frame", "missing", "frame: surface"),
    ({"figure": "round"}, "figure", "not known here", "oblate, sphere"),
    ({"emission": "limb-darkened"}, "emission.coefficient", "needs a coefficient", "0.5"),
    ({"emission": "{model: blackbody, coefficient: 1}"}, "emission.coefficient", "no coef", "Rem"),
    ({"pulse_shape": "{band: 1-2 keV}"}, "pulse_shape", "neither harmonics nor file", "Give one"),
    (
        {"pulse_shape": f"{{band: 1-2 keV, harmonics: [{ONE_HARMONIC}, {ONE_HARMONIC}]}}"},
        "pulse_shape.harmonics[1].number",
        "stands twice",
        "Remove",
    ),
    (
        {"pulse_shape": f"{{band: 1-2 keV, harmonics: {ONE_HARMONIC}, background: 3}}"},
        "pulse_shape.background",
        "belongs to a file",
        "Remove",
    ),
    (
        {"pulsed_fraction": "{value: 0.5, definition: rms, band: 1-2 keV, counts: 900}"},
        "pulsed_fraction.counts",
        "without bins",
        "Add bins",
    ),
    ({"name": '"two\\nlines"'}, "name", "one line", "Candidate A"),
    ({"distance": ""}, "distance", "no value", "distance: 350 pc"),
]

NOT_NUMBERS = ["nan pc", "inf pc", "1e400 pc", "No", "12:30:45", "1.0e20", "~", "true", "4 pc pc"]


@pytest.mark.parametrize(("text", "what"), SYNTAX, ids=[what for _, what in SYNTAX])
def test_broken_syntax_is_told(text: str, what: str) -> None:
    """One fault and no more."""
    with pytest.raises(InputError) as caught:
        read_target_text(text, "t.yaml")
    (fault,) = caught.value.faults
    assert what in fault.what
    assert fault.where.startswith("t.yaml")


def check(changes: Changes, key: str, what: str, remedy: str, kind: type[InputError]) -> None:
    """Require one fault of a kind at a key, in the line where the key stands."""
    text = document(DRAWN, changes)
    with pytest.raises(InputError) as caught:
        read_target_text(text, "t.yaml")
    (fault,) = caught.value.faults
    assert type(caught.value) is kind
    assert what in fault.what
    assert remedy in fault.remedy
    assert fault.where.startswith("t.yaml")
    assert fault.where.endswith(key)
    top = fault.where.rsplit(", ", 1)[-1].split(".")[0].split("[")[0]
    lines = [n for n, line in enumerate(text.splitlines(), 1) if line.startswith(f"{top}:")]
    assert not lines or f"line {lines[0]}, " in fault.where


@pytest.mark.parametrize(("changes", "key", "what", "remedy"), UNITS)
def test_wrong_unit_is_told(changes: Changes, key: str, what: str, remedy: str) -> None:
    """A UnitsError with an example."""
    check(changes, key, what, remedy, UnitsError)


@pytest.mark.parametrize(("changes", "key", "what", "remedy"), RANGES)
def test_value_out_of_range_is_told(changes: Changes, key: str, what: str, remedy: str) -> None:
    """An OutOfRangeError with the allowed range."""
    check(changes, key, what, remedy, OutOfRangeError)


@pytest.mark.parametrize(("changes", "key", "what", "remedy"), KEYS)
def test_wrong_key_is_told(changes: Changes, key: str, what: str, remedy: str) -> None:
    """An InputError with the nearest valid name or an example."""
    check(changes, key, what, remedy, InputError)


@pytest.mark.parametrize("text", NOT_NUMBERS)
def test_text_that_is_no_distance_is_refused(drawn: Reader, text: str) -> None:
    """Words and times of YAML, numbers that are not finite, no unit."""
    with pytest.raises(InputError) as caught:
        drawn(distance=f'"{text}"')
    assert caught.value.faults[0].where == "t.yaml, line 7, distance"


def test_duplicate_key_is_told() -> None:
    """With the lines of both."""
    with pytest.raises(InputError) as caught:
        read_target_text(document(DRAWN, {}) + "distance: 5 pc\n", "t.yaml")
    assert str(caught.value).startswith("t.yaml, line 8, distance: the key stands twice")
    assert "line 7" in caught.value.faults[0].what


@pytest.mark.parametrize(
    ("changes", "key", "what"),
    [
        ({"inclination": None}, "inclination", "hot spots need it"),
        ({"hot_spots": "[]"}, "hot_spots", "list is empty"),
        ({"hot_spots": ""}, "hot_spots", "list is wanted"),
        ({"hot_spots": "[{colatitude: 5 deg}]"}, "hot_spots[0].longitude", "missing"),
        ({"hot_spots": SPOT.format("190 deg", "8 deg")}, "hot_spots[0].colatitude", "out of"),
        ({"hot_spots": SPOT.format("50 deg", "0 deg")}, "hot_spots[0].angular_radius", "out of"),
        ({"hot_spots": SPOT.format("0.5", "8 deg")}, "hot_spots[0].colatitude", "no unit"),
        ({"mass": "2.6 Msun"}, "mass", "too compact"),
    ],
)
def test_broken_hot_spots_are_told(known: Reader, changes: Changes, key: str, what: str) -> None:
    """At the key that is wrong."""
    with pytest.raises(InputError) as caught:
        known(**changes)
    found = {fault.where.rsplit(", ", 1)[1]: fault.what for fault in caught.value.faults}
    assert what in found[key]


def test_all_faults_are_told_at_once(drawn: Reader) -> None:
    """Units, ranges, keys and rules over several keys in one error."""
    with pytest.raises(InputError) as caught:
        drawn(
            spin_frequency="250",
            distance="-3 pc",
            flux=None,
            colour="red",
            emission="limb-darkened",
            pulse_shape="{band: 2-1 keV, file: none.csv}",
        )
    keys = {fault.where.split(", ")[-1].split(" (")[0] for fault in caught.value.faults}
    assert keys == {
        *("spin_frequency", "distance", "flux", "colour", "emission.coefficient"),
        *("pulse_shape.band", "pulse_shape.file"),
    }


@settings(max_examples=150, deadline=None)
@given(st.sampled_from(sorted(DRAWN)), st.text(max_size=40))
def test_any_value_gives_a_target_or_an_input_error(key: str, text: str) -> None:
    """Nothing else is ever raised."""
    try:
        target = read_target_text(document(DRAWN, {key: text}))
    except InputError:
        return
    assert target.spin_hz > 0
