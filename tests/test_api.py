"""The public face: quantities in and out, bare numbers refused, paths and records alike."""

from __future__ import annotations

import inspect
import json
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from astropy import units

import exptime
from exptime import api, errors
from tests.cli.targets import AREA, INSTRUMENT, KNOWN


@pytest.fixture
def files(empty_folder: Path) -> tuple[str, str]:
    """Return the paths of a target with hot spots and an instrument."""
    (empty_folder / "target.yaml").write_text(KNOWN)
    (empty_folder / "instrument.yaml").write_text(INSTRUMENT)
    (empty_folder / "area.csv").write_text(AREA)
    return "target.yaml", "instrument.yaml"


def test_all_is_what_is_public() -> None:
    """Every function of the interface, every error, the version; nothing else, all of it there."""
    functions = {
        name
        for name, value in vars(api).items()
        if inspect.isfunction(value) and value.__module__ == api.__name__ and name[0] != "_"
    }
    faults = {
        name
        for name, value in vars(errors).items()
        if inspect.isclass(value) and issubclass(value, errors.ExptimeError)
    }
    readers = {"read_target", "read_instrument"}
    assert set(exptime.__all__) == functions | readers | faults | {"__version__"}
    assert sorted(exptime.__all__) == exptime.__all__
    assert dir(exptime) == exptime.__all__
    for name in exptime.__all__:
        assert getattr(exptime, name) is not None


def test_an_unknown_name_is_an_attribute_error() -> None:
    """As of any module."""
    with pytest.raises(AttributeError, match="no attribute 'forcast'"):
        exptime.forcast  # noqa: B018


@pytest.mark.parametrize("name", sorted(set(exptime.__all__) - {"__version__"}))
def test_everything_public_is_described(name: str) -> None:
    """A docstring that begins with a sentence."""
    text = inspect.getdoc(getattr(exptime, name))
    assert text
    assert text.split("\n")[0].rstrip(".") != text.split("\n")[0]


def test_a_forecast_gives_quantities(files: tuple[str, str]) -> None:
    """Texts and Quantities say the same; exposures come sorted; records do as paths do."""
    target, instrument = files
    texts = exptime.forecast(
        target, instrument, exposures=["1 Ms", "100 ks"], goals=[("radius", 0.05)]
    )
    quantities = exptime.forecast(
        exptime.read_target(target),
        exptime.read_instrument(instrument),
        exposures=[0.1, 1.0] * units.Ms,
        goals=[("radius", 5 * units.percent)],
    )
    assert texts.exposures.unit == units.s
    assert texts.exposures.value.tolist() == [1e5, 1e6]
    for name, unit in (("mass", units.Msun), ("radius", units.km), ("compactness", "")):
        for method in ("sigma", "data_sigma"):
            here = getattr(texts, method)(name)
            there = getattr(quantities, method)(name)
            assert set(here) == {"p16", "p50", "p84"}
            for key, value in here.items():
                assert value.unit == unit
                assert value.shape == (2,)
                np.testing.assert_array_equal(value, there[key])
    required = texts.required_exposures()
    assert len(required) == 1
    assert required[0]["p50"].to(units.ks) > 0 * units.ks
    assert required == quantities.required_exposures()


def test_defaults_are_those_of_the_command(files: tuple[str, str]) -> None:
    """13 exposures from 100 ks to 3 Ms and 5 per cent in radius."""
    found = exptime.forecast(*files)
    assert len(found.exposures) == 13
    assert found.exposures[0] == 100 * units.ks
    assert found.exposures[-1].to_value("Ms") == pytest.approx(3.0)
    assert [(each.goal.quantity, each.goal.precision) for each in found.record.goals] == [
        ("radius", 0.05)
    ]


def test_a_pulse_gives_quantities(files: tuple[str, str]) -> None:
    """Of a path and of a record; energies in any unit."""
    path = exptime.pulse(files[0], energies="300 eV", phases=16)
    record = exptime.pulse(exptime.read_target(files[0]), energies=0.3 * units.keV, phases=16)
    assert path.energies.to_value("keV").tolist() == pytest.approx([0.3])
    assert path.photon_flux.shape == (16, 1)
    assert path.photon_flux.unit.is_equivalent("ph / (cm2 s keV)")
    np.testing.assert_allclose(path.photon_flux, record.photon_flux, rtol=1e-12)
    np.testing.assert_allclose(path.phase, (np.arange(16) + 0.5) / 16)


def test_counts_give_quantities(files: tuple[str, str]) -> None:
    """Source and background in counts, channels in keV; a number of phase bins of one's own."""
    counts = exptime.expected_counts(*files, "100 ks", phases=20)
    record = exptime.expected_counts(
        exptime.read_target(files[0]),
        exptime.read_instrument(files[1]),
        100 * units.ks,
        phases=20,
    )
    assert counts.source_counts.unit == counts.background_counts.unit == units.ct
    assert counts.source_counts.shape == (20, len(counts.channel_edges) - 1)
    assert counts.channel_edges.unit == units.keV
    assert counts.background_counts.sum().value == pytest.approx(0.2 * 1e5)
    np.testing.assert_array_equal(counts.source_counts, record.source_counts)


def test_check_reads_and_says_what_it_read(files: tuple[str, str]) -> None:
    """Paths and records alike, with and without an instrument."""
    checked = exptime.check(*files)
    assert checked.target.name == "Known source"
    assert checked.instrument is not None
    again = exptime.check(exptime.read_target(files[0]), exptime.read_instrument(files[1]))
    assert checked.to_text() == again.to_text()
    assert exptime.check(files[0]).instrument is None


def test_the_starter_runs_as_it_is(empty_folder: Path) -> None:
    """Its text is a target file; the shipped instruments can be read by their ids."""
    (empty_folder / "mine.yaml").write_text(exptime.starter_target("Mine"))
    listed = exptime.list_instruments().instruments
    assert len(listed) >= 3
    for instrument in listed:
        assert exptime.check("mine.yaml", instrument.id).instrument.name == instrument.name


def test_results_show_themselves(files: tuple[str, str]) -> None:
    """Text, JSON and what a notebook asks for."""
    forecast = exptime.forecast(*files, exposures="1 Ms")
    assert "Known source" in str(forecast)
    assert max(len(line) for line in forecast.to_text(60).splitlines()) <= 60
    assert json.loads(forecast.to_json())["schema"] == "exptime.forecast/1"
    assert forecast.headline
    assert "<" in forecast._repr_html_()
    assert forecast.to_html().lstrip().lower().startswith("<!doctype html>")
    pulse = exptime.pulse(files[0], energies="1 keV", phases=8)
    counts = exptime.expected_counts(*files, "1 Ms")
    assert json.loads(pulse.to_json())["schema"] == "exptime.pulse/1"
    assert json.loads(counts.to_json())["schema"] == "exptime.counts/1"
    for result in (pulse, counts):
        assert str(result)
        assert "<" in result._repr_html_()


BARE: list[tuple[str, Callable[[str, str], Any]]] = [
    ("exposures", lambda t, i: exptime.forecast(t, i, exposures=[1e5])),  # type: ignore[list-item]
    ("exposures", lambda t, i: exptime.forecast(t, i, exposures="100")),
    ("exposure", lambda t, i: exptime.expected_counts(t, i, 1e5)),  # type: ignore[arg-type]
    ("energies", lambda t, i: exptime.pulse(t, energies=1.0)),  # type: ignore[arg-type]
    ("energies", lambda t, i: exptime.pulse(t, energies="1 km")),
    ("exposures", lambda t, i: exptime.forecast(t, i, exposures=3 * units.km)),
]


@pytest.mark.parametrize(("name", "call"), BARE)
def test_a_bare_number_or_a_wrong_unit_is_refused(
    files: tuple[str, str], name: str, call: Callable[[str, str], Any]
) -> None:
    """A UnitsError that names the argument and shows a good one."""
    with pytest.raises(exptime.UnitsError, match=name) as caught:
        call(*files)
    assert "Give for example" in str(caught.value) or "Write for example" in str(caught.value)


WRONG: list[tuple[str, Callable[[str, str], Any]]] = [
    ("exposures", lambda t, i: exptime.forecast(t, i, exposures="0 s")),
    ("exposures", lambda t, i: exptime.forecast(t, i, exposures="1e9 s")),
    ("exposures", lambda t, i: exptime.forecast(t, i, exposures=[])),
    ("exposures", lambda t, i: exptime.forecast(t, i, exposures=float("nan") * units.s)),
    ("goals", lambda t, i: exptime.forecast(t, i, goals=[("weight", 0.05)])),
    ("goals", lambda t, i: exptime.forecast(t, i, goals=[("radius", 5.0)])),
    ("goals", lambda t, i: exptime.forecast(t, i, goals=[("radius", 0.0)])),
    ("margin", lambda t, i: exptime.forecast(t, i, margin=-0.1)),
    ("margin", lambda t, i: exptime.forecast(t, i, margin=float("nan"))),
    ("draws", lambda t, i: exptime.forecast(t, i, draws=1)),
    ("draws", lambda t, i: exptime.forecast(t, i, draws=True)),
    ("draws", lambda t, i: exptime.forecast(t, i, draws=64.5)),  # type: ignore[arg-type]
    ("seed", lambda t, i: exptime.forecast(t, i, seed=-1)),
    ("jobs", lambda t, i: exptime.forecast(t, i, jobs=0)),
    ("phases", lambda t, i: exptime.pulse(t, phases=2)),
    ("phases", lambda t, i: exptime.expected_counts(t, i, "1 Ms", phases=10_000)),
    ("energies", lambda t, i: exptime.pulse(t, energies="-1 keV")),
    ("energies", lambda t, i: exptime.pulse(t, energies=["1 keV", "0 keV"])),
    ("seed", lambda t, i: exptime.forecast(t, i, seed="one")),  # type: ignore[arg-type]
    ("draws", lambda t, i: exptime.forecast(t, i, draws=float("nan"))),  # type: ignore[arg-type]
    ("goals", lambda t, i: exptime.forecast(t, i, goals=["radius"])),  # type: ignore[list-item]
    ("exposure", lambda t, i: exptime.expected_counts(t, i, ["1 Ms", "2 Ms"])),  # type: ignore[arg-type]
]


@pytest.mark.parametrize(("name", "call"), WRONG)
def test_a_value_that_does_not_do_is_refused(
    files: tuple[str, str], name: str, call: Callable[[str, str], Any]
) -> None:
    """An InputError that names the argument."""
    with pytest.raises(exptime.InputError, match=name):
        call(*files)


def test_faults_of_files_are_told_where_they_stand(files: tuple[str, str]) -> None:
    """The file and its line; a file that is missing; an instrument that is none."""
    Path("broken.yaml").write_text(KNOWN.replace("57 deg", "57 km"))
    with pytest.raises(exptime.InputError, match=r"broken\.yaml.*7"):
        exptime.forecast("broken.yaml", files[1])
    with pytest.raises(exptime.InputError, match=r"nowhere\.yaml"):
        exptime.pulse("nowhere.yaml")
    with pytest.raises(exptime.InputError, match="no-such-instrument"):
        exptime.forecast(files[0], "no-such-instrument")
