"""What a target file says, key by key."""

from __future__ import annotations

import math
from collections.abc import Callable
from pathlib import Path

import pytest

from exptime.errors import InputError
from exptime.star.records import Emission
from exptime.target.reader import read_target, read_target_text
from exptime.target.records import HarmonicShape, Measured, Target
from tests.target.conftest import DRAWN, document

Reader = Callable[..., Target]


def test_required_keys_are_enough(drawn: Reader) -> None:
    """Numbers arrive in the units of their records."""
    target = drawn()
    assert target.name == "Source B"
    assert target.file == "t.yaml"
    assert target.spin_hz == 250.0
    assert target.flux is not None
    assert target.flux.value == 4e-13
    assert target.flux.band_kev == (0.5, 2.0)
    assert target.flux.absorbed is True
    assert target.flux.uncertainty is None
    assert target.column_density == Measured(value=2e20)
    assert target.distance == Measured(value=400.0, uncertainty=30.0)
    assert target.temperature is not None
    assert (target.temperature.value_kev, target.temperature.frame) == (0.12, "surface")
    assert (target.mass, target.radius, target.inclination, target.hot_spots) == (None,) * 4
    assert target.emission == Emission()
    assert (target.figure, target.abundances) == ("oblate", "interstellar")
    assert target.warnings == ()


def test_spin_may_be_a_period(drawn: Reader) -> None:
    """4 ms is 250 Hz."""
    target = drawn(spin_frequency=None, spin_period="4.0 ms")
    assert target.spin_hz == pytest.approx(250.0, rel=1e-14)


def test_distance_without_uncertainty_is_a_fifth_uncertain(drawn: Reader) -> None:
    """And the report says so."""
    target = drawn(distance="400 pc")
    assert target.distance == Measured(value=400.0, uncertainty=80.0)
    assert any("distance is taken to be 20 % uncertain" in text for text in target.assumptions)


def test_pulsed_fraction_without_uncertainty_is_a_tenth_uncertain(drawn: Reader) -> None:
    """And the report says so."""
    text = "{value: 50 %, definition: peak-to-trough, band: 0.5-2 keV}"
    target = drawn(pulsed_fraction=text)
    (fraction,) = target.pulsed_fractions
    assert fraction.value == 0.5
    assert fraction.uncertainty == pytest.approx(0.05)
    assert not fraction.uncertainty_given
    assert any("by 10 % of its value" in text for text in target.assumptions)


def test_relative_uncertainty_of_a_fraction_is_said(drawn: Reader) -> None:
    """Ten per cent of one half could be mistaken for ten points."""
    text = "{value: 0.5, uncertainty: 10 %, definition: rms, band: 0.5-2 keV}"
    target = drawn(pulsed_fraction=text)
    assert target.pulsed_fractions[0].uncertainty == pytest.approx(0.05)
    assert any("is relative to its value: 0.05" in text for text in target.assumptions)


def test_pulsed_fractions_may_be_a_list(drawn: Reader) -> None:
    """Each with its own definition, band, instrument, counts and bins."""
    target = drawn(
        pulsed_fraction="[{value: 0.5, definition: rms, band: 0.5-2 keV}, {value: 1.4, "
        "definition: full-swing, band: 300-900 eV, instrument: array, counts: 12000, bins: 16}]"
    )
    first, second = target.pulsed_fractions
    assert (first.instrument, first.counts, first.bins) == (None, None, None)
    assert second.band_kev == pytest.approx((0.3, 0.9))
    assert (second.definition, second.instrument) == ("full-swing", "array")
    assert (second.counts, second.bins) == (12000.0, 16)


def test_harmonics_are_read(drawn: Reader) -> None:
    """One entry, two harmonics."""
    target = drawn(
        pulse_shape="{band: 0.5-2 keV, harmonics: [{number: 1, fraction: 0.4, uncertainty: 0.02}, "
        "{number: 2, fraction: 12 %, uncertainty: 3 %}]}"
    )
    (shape,) = target.pulse_shapes
    assert isinstance(shape, HarmonicShape)
    assert [(each.number, each.fraction) for each in shape.harmonics] == [(1, 0.4), (2, 0.12)]
    assert shape.harmonics[1].uncertainty == pytest.approx(0.03)


def test_hot_spots_need_no_flux_fraction_and_temperature(known: Reader) -> None:
    """Angles become radians, longitude lies within one turn."""
    target = known(
        hot_spots="[{colatitude: {value: 90 deg, uncertainty: 2 deg}, longitude: -90 deg, "
        "angular_radius: {value: 0.1 rad, uncertainty: 0}, temperature: 1.16045181e6 K}]"
    )
    assert (target.flux, target.temperature, target.pulsed_fractions) == (None, None, ())
    assert target.hot_spots is not None
    (spot,) = target.hot_spots
    assert spot.colatitude.value == pytest.approx(math.pi / 2)
    assert spot.colatitude.uncertainty == pytest.approx(math.radians(2.0))
    assert spot.longitude == Measured(value=pytest.approx(1.5 * math.pi))
    assert spot.angular_radius == Measured(value=0.1, uncertainty=0.0)
    # 1 keV/k = 1.16045181e7 K (CODATA 2018), the printed digits
    assert spot.temperature_kev.value == pytest.approx(0.1, rel=1e-8)


def test_inclination_above_ninety_is_reflected_with_all_colatitudes(known: Reader) -> None:
    """The star seen from the other side of its equator; uncertainties stay."""
    target = known(inclination="{value: 120 deg, uncertainty: 3 deg}")
    assert target.inclination is not None
    assert target.inclination.value == pytest.approx(math.radians(60.0))
    assert target.inclination.uncertainty == pytest.approx(math.radians(3.0))
    assert target.hot_spots is not None
    assert target.hot_spots[0].colatitude.value == pytest.approx(math.radians(130.0))
    assert target.hot_spots[0].longitude.value == pytest.approx(math.radians(20.0))
    assert any("120 deg is above 90 deg: it was reflected to 60 deg" in w for w in target.warnings)


def test_inclination_of_ninety_is_left_alone(known: Reader) -> None:
    """Ninety is not above ninety."""
    target = known(inclination="90 deg")
    assert target.inclination is not None
    assert target.inclination.value == pytest.approx(math.pi / 2)
    assert target.warnings == ()


def test_unused_keys_beside_hot_spots_are_a_warning(known: Reader) -> None:
    """The spots win."""
    target = known(temperature="{value: 0.1 keV, frame: surface}")
    assert target.warnings == ("The key temperature is not used: hot spots are given.",)


def test_overlapping_hot_spots_are_a_warning(known: Reader) -> None:
    """Two spots of eight degrees ten degrees apart."""
    spot = "{{colatitude: {} deg, longitude: 0 deg, angular_radius: 8 deg, temperature: 0.1 keV}}"
    touching = known(hot_spots=f"[{spot.format(50)}, {spot.format(60)}]")
    assert any("overlap" in warning for warning in touching.warnings)
    apart = known(hot_spots=f"[{spot.format(50)}, {spot.format(67)}]")
    assert apart.warnings == ()


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("blackbody", Emission()),
        ("{model: blackbody}", Emission()),
        (
            "{model: limb-darkened, coefficient: 0.5}",
            Emission(model="limb-darkened", coefficient=0.5),
        ),
    ],
)
def test_emission_is_read(drawn: Reader, text: str, expected: Emission) -> None:
    """A bare word stands for the model."""
    assert drawn(emission=text).emission == expected


def test_whatever_was_not_given_is_an_assumption(drawn: Reader) -> None:
    """Mass, radius, inclination, geometry, column, abundances, figure, emission."""
    text = "\n".join(drawn().assumptions)
    for words in (
        *("The mass was not given", "The radius was not given", "The inclination was not given"),
        *("geometry is not known", "column was given without", "interstellar abundances"),
        *("figure was not given", "emission was not given"),
    ):
        assert words in text


def test_whatever_was_given_is_no_assumption(known: Reader) -> None:
    """With everything given nothing is left to say."""
    target = known(
        mass="{value: 1.4 Msun, uncertainty: 0.1 Msun}",
        radius="{value: 12 km, uncertainty: 0}",
        inclination="{value: 60 deg, uncertainty: 1 deg}",
        column_density="{value: 2e20 cm-2, uncertainty: 5 %}",
        figure="sphere",
        emission="blackbody",
        abundances="solar-1982",
    )
    assert target.assumptions == ()
    assert (target.figure, target.abundances) == ("sphere", "solar-1982")
    assert target.radius == Measured(value=12.0, uncertainty=0.0)


def test_value_without_uncertainty_keeps_its_flat_prior(drawn: Reader) -> None:
    """It only says where the forecast is made."""
    target = drawn(mass="1.5 Msun", inclination="70 deg")
    text = "\n".join(target.assumptions)
    assert "The mass was given without an uncertainty: a flat prior from 1.1 to 2.6" in text
    assert "The inclination was given without an uncertainty" in text


def test_entries_echo_every_scalar(drawn: Reader) -> None:
    """Key path, text as written and line, in file order."""
    entries = drawn().entries
    assert [(e.key, e.text, e.line) for e in entries[:4]] == [
        ("name", "Source B", 1),
        ("spin_frequency", "250 Hz", 2),
        ("flux.value", "4e-13 erg s-1 cm-2", 3),
        ("flux.band", "0.5-2.0 keV", 3),
    ]


@pytest.mark.parametrize("name", ["No", "12:30:45", "1.0e20", "[bold]x[/bold]", "<b>&amp;</b>"])
def test_name_stays_what_was_written(drawn: Reader, name: str) -> None:
    """Words that YAML would turn into something else, and markup."""
    assert drawn(name=f'"{name}"').name == name


FOLDED = "phase,counts\n" + "".join(f"{(k + 0.5) / 8},{100 + 20 * (k % 4)}\n" for k in range(8))


def test_folded_file_lies_beside_the_target_file(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Whatever the working directory."""
    (tmp_path / "data").mkdir()
    (tmp_path / "data" / "folded.csv").write_text(FOLDED)
    shape = "{band: 0.5-2 keV, file: folded.csv, background: 30}"
    path = tmp_path / "data" / "t.yaml"
    path.write_text(document(DRAWN, {"pulse_shape": shape}))
    monkeypatch.chdir(tmp_path)
    target = read_target("data/t.yaml")
    assert target.file == "data/t.yaml"
    assert len(target.pulse_shapes) == 1


def test_unreadable_file_is_an_input_error(tmp_path: Path) -> None:
    """Missing, and a folder."""
    with pytest.raises(InputError, match="no such file"):
        read_target(str(tmp_path / "none.yaml"))
    with pytest.raises(InputError, match="a folder"):
        read_target(str(tmp_path))


def test_line_ends_and_byte_order_mark_are_harmless(tmp_path: Path) -> None:
    """As editors on other systems write them."""
    text = document(DRAWN, {})
    path = tmp_path / "t.yaml"
    path.write_bytes(b"\xef\xbb\xbf" + text.replace("\n", "\r\n").encode())
    assert read_target(str(path)).entries == read_target_text(text).entries
