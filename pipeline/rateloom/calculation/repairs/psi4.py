"""Repairs of cclib's reader of Psi4."""

import re

from cclib.parser.logfilewrapper import FileWrapper
from cclib.parser.psi4parser import Psi4
from packaging.version import parse

VERSION = re.compile(r"\d+\.\d+(?:\.\d+)?")


class RepairedPsi4(Psi4):
    """Reads builds without a git revision, and vibrations of linear molecules."""

    def extract(self, inputfile: FileWrapper, line: str) -> None:
        """Read what begins at a line."""
        if "An Open-Source Ab Initio Electronic Structure Package" in line:
            # Debian prints `Git: Rev {} zzzzzzz`, of which no version can be made.
            words = next(inputfile).split()
            self.version_4_beta = any("beta" in word for word in words)
            found = VERSION.search(" ".join(words))
            self.package_version = parse(found.group() if found else "0.5")
            return
        if "orbital energies" in line.lower():
            # Not needed here, and an assertion stops at an atom without beta electrons.
            return
        if line.strip().startswith("Using finite-differences"):
            # cclib gives up geometries and energies from here on, also those of the reference.
            return
        if line.strip() == "==> Harmonic Vibrational Analysis <==":
            self.read_vibrations(inputfile)
            return
        super().extract(inputfile, line)

    def read_vibrations(self, inputfile: FileWrapper) -> None:
        """Read all blocks of vibrations; cclib counts on 3 N - 6, which fails for linear molecules."""
        frequencies: list[float] = []
        displacements: list[list[list[float]]] = []
        line = next(inputfile)
        while "==>" not in line:
            if line.split()[:1] == ["Vibration"]:
                found = self.parse_vibration(len(line.split()) - 1, inputfile)
                frequencies.extend(found[0])
                displacements.extend(found[2])
                self.set_attribute("vibfreqs", frequencies)
                self.set_attribute("vibdisps", displacements)
            line = next(inputfile)
        super().extract(inputfile, line)
