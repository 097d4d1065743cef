"""Open measured data from pvlib's source distribution, fetched once through the package index and kept in the user's cache.

The files are read where they are and never copied into the project: some of their makers allow use, not redistribution.
"""

from __future__ import annotations

import os
import subprocess
import sys
import tarfile
import tempfile
import zipfile
from functools import lru_cache
from pathlib import Path

import pytest

VERSION = "0.16.1"
FOLDER = f"pvlib-{VERSION}/tests/data/"
WANTED = (
    "surfrad-slv16001.dat",
    "bsrn-pay0616.dat.gz",
    "NLD_Amsterdam062400_IWEC.epw",
    "tmy_45.000_8.000_2005_2023.epw",
    "tmy_45.000_8.000_2005_2023.csv",
    "tmy_45.000_8.000_2005_2023.json",
    "test_read_psm3.csv",
    "test_read_psm4.csv",
    "test_psm4_2023.csv",
    "test_psm4_tmy-2023.csv",
    "test_psm4_full_disc_2023.csv",
    "pvgis_tmy_test.csv",
)
TYPICAL = "1.3.1"  # version of diyepw, whose wheel holds three typical years
TYPICAL_FOLDER = "diyepw/data/tmy_epw_files/"


def data_file(name: str) -> Path:
    """Path of one of the files; skips the test, saying why, where the archive can't be had."""
    found = _folder() / name
    if not found.exists():
        pytest.skip(f"{name}: the source distribution of pvlib {VERSION} can't be had from the package index here")
    return found


def typical_files() -> list[Path]:
    """Paths of the typical years in EPW of the package diyepw; skips the test where it can't be had."""
    found = sorted(_typical_folder().glob("*.epw"))
    if not found:
        pytest.skip(f"the wheel of diyepw {TYPICAL} can't be had from the package index here")
    return found


@lru_cache(maxsize=1)
def _typical_folder() -> Path:
    cache = _cache(f"diyepw-{TYPICAL}")
    if not any(cache.glob("*.epw")):
        cache.mkdir(parents=True, exist_ok=True)
        with tempfile.TemporaryDirectory() as temporary:
            command = [sys.executable, "-m", "pip", "download", "--quiet", "--no-deps", "--dest", temporary]
            subprocess.run([*command, f"diyepw=={TYPICAL}"], check=False, capture_output=True, timeout=300)
            for wheel in Path(temporary).glob("*.whl"):
                with zipfile.ZipFile(wheel) as packed:
                    for name in packed.namelist():
                        if name.startswith(TYPICAL_FOLDER) and name.endswith(".epw"):
                            (cache / Path(name).name).write_bytes(packed.read(name))
    return cache


def _cache(name: str) -> Path:
    return Path(os.environ.get("XDG_CACHE_HOME", Path.home() / ".cache")) / "noonplate-tests" / name


@lru_cache(maxsize=1)
def _folder() -> Path:
    cache = _cache(f"pvlib-{VERSION}")
    if not all((cache / name).exists() for name in WANTED):
        cache.mkdir(parents=True, exist_ok=True)
        with tempfile.TemporaryDirectory() as temporary:
            _fetch(Path(temporary))
            _unpack(Path(temporary), into=cache)
    return cache


def _fetch(folder: Path) -> None:
    command = [
        sys.executable,
        "-m",
        "pip",
        "download",
        "--quiet",
        "--no-deps",
        "--no-binary",
        "pvlib",
        "--dest",
        folder,
    ]
    subprocess.run([*command, f"pvlib=={VERSION}"], check=False, capture_output=True, timeout=300)


def _unpack(folder: Path, *, into: Path) -> None:
    for archive in folder.glob("*.tar.gz"):
        with tarfile.open(archive) as packed:
            for name in WANTED:
                content = packed.extractfile(FOLDER + name)
                if content is not None:
                    (into / name).write_bytes(content.read())
