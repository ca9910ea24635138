"""Binary tables of FITS files."""

from __future__ import annotations

import gzip
from pathlib import Path

import numpy as np
import pytest
from astropy.io import fits

from exptime.documents.columns import Table, Wanted
from exptime.documents.faults import Faults
from exptime.documents.fits_tables import is_fits, read_fits_table

WANTED = (
    Wanted("ENERG_LO", "keV"),
    Wanted("ENERG_HI", "keV"),
    Wanted("SPECRESP", "cm2"),
)
LOWER = np.linspace(0.3, 2.9, 200)


def make(
    path: Path, *, name: str = "SPECRESP", form: str = "E", area_unit: str | None = "cm**2"
) -> Path:
    """Write an effective-area file of the usual form."""
    columns = [
        fits.Column("ENERG_LO", form, unit="keV", array=LOWER),
        fits.Column("ENERG_HI", form, unit="keV", array=LOWER + 0.1),
        fits.Column("SPECRESP", form, unit=area_unit, array=100.0 * LOWER),
    ]
    table = fits.BinTableHDU.from_columns(columns, name=name)
    table.header["HDUCLAS1"] = "RESPONSE"
    table.header["HDUCLAS2"] = "SPECRESP"
    fits.HDUList([fits.PrimaryHDU(), table]).writeto(path)
    return path


def read(path: Path, wanted: tuple[Wanted, ...] = WANTED) -> tuple[Table | None, Faults]:
    """Return table and faults."""
    faults = Faults()
    table = read_fits_table(
        str(path), extensions=("SPECRESP",), classes=("SPECRESP",), wanted=wanted, faults=faults
    )
    return table, faults


@pytest.mark.parametrize(("form", "tolerance"), [("E", 1e-7), ("D", 0.0)])
def test_columns_are_native_numbers_with_units(tmp_path: Path, form: str, tolerance: float) -> None:
    """FITS is big-endian; single precision keeps seven digits."""
    table, faults = read(make(tmp_path / "a.arf", form=form))
    assert faults.found == ()
    assert table is not None
    values = table.values("SPECRESP")
    assert values.dtype == np.dtype("=f8")
    np.testing.assert_allclose(values, 100.0 * LOWER, rtol=tolerance)
    assert table.header["HDUCLAS1"] == "RESPONSE"
    assert table.columns["SPECRESP"].unit_source == "SPECRESP in cm**2 as its header says"
    assert table.where("SPECRESP", 3) == (
        f"{tmp_path / 'a.arf'}, extension SPECRESP, row 4, column SPECRESP"
    )


def test_unit_that_is_not_told_is_assumed_and_said(tmp_path: Path) -> None:
    """Some files leave TUNIT out."""
    table, _ = read(make(tmp_path / "a.arf", area_unit=None))
    assert table is not None
    assert "taken to be in cm2" in table.columns["SPECRESP"].unit_source


def test_table_is_found_by_its_class(tmp_path: Path) -> None:
    """EXTNAME may be anything where HDUCLAS2 tells."""
    table, faults = read(make(tmp_path / "a.arf", name="WHATEVER"))
    assert faults.found == ()
    assert table is not None


def test_gzip_is_unpacked(tmp_path: Path) -> None:
    """A packed file reads like a plain one; a damaged archive is told."""
    content = make(tmp_path / "a.arf").read_bytes()
    packed = tmp_path / "a.arf.gz"
    packed.write_bytes(gzip.compress(content))
    table, faults = read(packed)
    assert faults.found == ()
    assert table is not None
    packed.write_bytes(gzip.compress(content)[:500])
    table, faults = read(packed)
    assert table is None
    assert "gzip archive is damaged" in faults.found[0].what


def test_missing_column_and_extension_are_told(tmp_path: Path) -> None:
    """File, extension and what is there instead."""
    path = make(tmp_path / "a.arf")
    table, faults = read(path, (*WANTED, Wanted("RATE", "ct s-1")))
    assert table is None
    assert faults.found[0].where == f"{path}, extension SPECRESP"
    assert "no column RATE" in faults.found[0].what
    assert "ENERG_LO, ENERG_HI, SPECRESP" in faults.found[0].remedy
    faults = Faults()
    table = read_fits_table(str(path), extensions=("SPECTRUM",), wanted=WANTED, faults=faults)
    assert table is None
    assert "no extension SPECTRUM" in faults.found[0].what
    assert "SPECRESP" in faults.found[0].remedy


def test_image_without_a_table_is_told(tmp_path: Path) -> None:
    """An image is FITS too."""
    path = tmp_path / "image.fits"
    fits.PrimaryHDU(np.zeros((4, 4))).writeto(path)
    table, faults = read(path)
    assert table is None
    assert "no binary table" in faults.found[0].remedy


def test_wrong_unit_and_not_finite_values_are_told(tmp_path: Path) -> None:
    """With extension and column."""
    path = make(tmp_path / "a.arf", area_unit="s")
    table, faults = read(path)
    assert table is None
    assert faults.found[0].where == f"{path}, extension SPECRESP, column SPECRESP"
    path = tmp_path / "b.arf"
    with fits.open(make(tmp_path / "c.arf")) as hdus:
        hdus[1].data["SPECRESP"][5] = np.nan
        hdus.writeto(path)
    table, faults = read(path)
    assert table is None
    assert faults.found[0].where.endswith("row 6, column SPECRESP")


def test_column_of_arrays_or_texts_is_told(tmp_path: Path) -> None:
    """One number per row is wanted."""
    path = tmp_path / "a.arf"
    columns = [
        fits.Column("ENERG_LO", "3E", array=np.zeros((4, 3))),
        fits.Column("ENERG_HI", "8A", array=["a", "b", "c", "d"]),
        fits.Column("SPECRESP", "E", array=np.ones(4)),
    ]
    fits.BinTableHDU.from_columns(columns, name="SPECRESP").writeto(path)
    table, faults = read(path)
    assert table is None
    assert [fault.where.rsplit(", ", 1)[1] for fault in faults.found] == [
        *("column ENERG_LO", "column ENERG_HI")
    ]


def test_file_that_is_not_fits_is_told(tmp_path: Path) -> None:
    """Text, nothing, and no file at all."""
    path = tmp_path / "a.arf"
    path.write_text("energy area\n1 2\n")
    assert "not a FITS file" in read(path)[1].found[0].what
    path.write_bytes(b"")
    assert "not a FITS file" in read(path)[1].found[0].what
    assert "no such file" in read(tmp_path / "none.arf")[1].found[0].what


def test_kind_of_file_is_known_by_its_first_bytes(tmp_path: Path) -> None:
    """Whatever its name."""
    path = make(tmp_path / "area.dat")
    assert is_fits(str(path))
    path.write_text("1 2\n")
    assert not is_fits(str(path))


@pytest.mark.parametrize("share", [0.05, 0.3, 0.5, 0.7, 0.9])
def test_truncated_file_is_told(tmp_path: Path, share: float) -> None:
    """Cut anywhere, it is a fault of this file and no traceback."""
    path = make(tmp_path / "a.arf")
    content = path.read_bytes()
    path.write_bytes(content[: int(share * len(content))])
    table, faults = read(path)
    assert table is None
    assert faults.found[0].where.startswith(str(path))


def test_damaged_files_never_raise(tmp_path: Path) -> None:
    """Random bytes in the headers: a table or a fault."""
    content = make(tmp_path / "a.arf").read_bytes()
    generator = np.random.default_rng(5)
    path = tmp_path / "b.arf"
    told = 0
    for _ in range(60):
        damaged = bytearray(content)
        for position in generator.integers(30, 2880 * 3, size=12):
            damaged[position] = generator.integers(0, 256)
        path.write_bytes(damaged)
        table, faults = read(path)
        assert (table is None) == (len(faults) > 0)
        told += len(faults) > 0
    assert told > 5
