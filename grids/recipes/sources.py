"""The archives the tables are made of: names, versions, checksums, and access to the files inside them."""

from __future__ import annotations

import gzip
import hashlib
import io
import tarfile
import zipfile
from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path

import numpy as np

_CHUNK = 1 << 20


@dataclass(frozen=True)
class Archive:
    """One package archive.

    Attributes
    ----------
    package, version : the name and version on the package index
    file : the archive's file name
    sha256 : checksum of the archive, hexadecimal
    licence : licence of the packaging, as stated in the archive
    """

    package: str
    version: str
    file: str
    sha256: str
    licence: str


ARCHIVES: Mapping[str, Archive] = {
    "pypeit": Archive(
        "pypeit",
        "1.8.1",
        "pypeit-1.8.1.tar.gz",
        "aa97267c59de7a06cf66e515663578642ba1e20b6b436b0581abd52944ac2d2c",
        "BSD-3-Clause",
    ),
    "exosims": Archive(
        "exosims",
        "3.6.6",
        "exosims-3.6.6-py3-none-any.whl",
        "09238a29e7df461d2f65327bcf03f5521f0165992c43d97a6bfc79280637ad29",
        "BSD-3-Clause",
    ),
    "meanstars": Archive(
        "meanstars",
        "3.6.1",
        "meanstars-3.6.1-py3-none-any.whl",
        "ed740c346dcb522742d16eed00c8cd3a14df9157b0d6f7d5cf2bb9ef9538ff67",
        "BSD-3-Clause",
    ),
    "wdphottools": Archive(
        "wdphottools",
        "0.0.14",
        "wdphottools-0.0.14-py3-none-any.whl",
        "5dd70209d0557387cc2424d04595c141894a11a380d8dee346349936e0b2699b",
        "BSD-3-Clause",
    ),
    "speclite": Archive(
        "speclite",
        "1.0.0",
        "speclite-1.0.0-py3-none-any.whl",
        "4bc8cb7f718b347e0ce566cb5ed341684c8efebe4a77f2a49aabe8ee085465d7",
        "BSD-3-Clause",
    ),
    "sedpy": Archive(
        "astro-sedpy",
        "0.4.1",
        "astro_sedpy-0.4.1-py3-none-any.whl",
        "162e9d5604cc324597be7c5a7c586fbd57ae9fdd55d22957e2c8bce908cd72d1",
        "MIT",
    ),
    "pyphot": Archive(
        "pyphot",
        "2.1.1",
        "pyphot-2.1.1-py3-none-any.whl",
        "98937d2ee371a7fd490ce1528474fd3a8da0a033da9e9b236a5a4a93d52a3456",
        "MIT",
    ),
    "piscola": Archive(
        "piscola",
        "3.1.0",
        "piscola-3.1.0-py3-none-any.whl",
        "60e88c6b75c7968f5f8f3beeb142b33464991ee270d0802f031fd769bf19d575",
        "MIT",
    ),
    "dustapprox": Archive(
        "dustapprox",
        "0.2.0",
        "dustapprox-0.2.0-py3-none-any.whl",
        "0bf5d338b8619b25e00daba80fc416ee9b689148a6af089dd80d18cf6d8e3dfd",
        "BSD-3-Clause",
    ),
}
_TAR_FOLDER = "pypeit-1.8.1/pypeit/data/standards/"
_TAR_WANTED = ("kurucz93/kp00/kp00_", "calspec/")


def file_sha256(path: Path) -> str:
    """Return the SHA-256 of a file as 64 hexadecimal digits."""
    digest = hashlib.sha256()
    with path.open("rb") as stream:
        while block := stream.read(_CHUNK):
            digest.update(block)
    return digest.hexdigest()


class Sources:
    """Read access to the files inside a folder of package archives.

    Parameters
    ----------
    folder : where the archives lie, under the file names of :data:`ARCHIVES`

    Raises
    ------
    FileNotFoundError : an archive that is asked for is not in the folder
    ValueError : an archive's checksum is not the one the tables were made from
    """

    def __init__(self, folder: Path) -> None:  # noqa: D107 - the class docstring lists the parameters
        self.folder = folder
        self._zips: dict[str, zipfile.ZipFile] = {}
        self._tar: dict[str, bytes] = {}

    def path(self, key: str) -> Path:
        """Return the checked path of one archive, ``key`` as in :data:`ARCHIVES`."""
        archive = ARCHIVES[key]
        path = self.folder / archive.file
        if not path.is_file():
            raise FileNotFoundError(f"{path} is missing: pip download --no-deps {archive.package}=={archive.version}")
        found = file_sha256(path)
        if found != archive.sha256:
            raise ValueError(f"{path} has SHA-256 {found}, the tables were made from {archive.sha256}")
        return path

    def read(self, key: str, member: str) -> bytes:
        """Return the bytes of one file of a wheel."""
        if key not in self._zips:
            self._zips[key] = zipfile.ZipFile(self.path(key))
        return self._zips[key].read(member)

    def text(self, key: str, member: str) -> str:
        """Return one file of a wheel as text."""
        return self.read(key, member).decode("utf-8", errors="replace")

    def standards(self) -> Mapping[str, bytes]:
        """Return the model atmospheres and standard-star spectra of pypeit, name -> uncompressed bytes."""
        if not self._tar:
            with tarfile.open(self.path("pypeit"), "r:gz") as tar:
                for info in tar:
                    name = info.name.removeprefix(_TAR_FOLDER)
                    if info.isfile() and name != info.name and name.startswith(_TAR_WANTED):
                        stream = tar.extractfile(info)
                        data = stream.read() if stream else b""
                        key = name.removesuffix(".gz")
                        self._tar[key] = gzip.decompress(data) if name.endswith(".gz") else data
        return self._tar


def fits_columns(data: bytes, *names: str) -> list[np.ndarray]:
    """Return the named columns of a FITS file's first table as native float64 arrays."""
    import warnings

    from astropy.io import fits

    with warnings.catch_warnings():
        warnings.simplefilter("ignore")  # the 1993 tables carry null keywords that today's reader does not know
        with fits.open(io.BytesIO(data)) as hdus:
            return [np.asarray(hdus[1].data[name], dtype=np.float64) for name in names]
