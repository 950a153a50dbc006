"""Repairs of cclib's reader of Molpro."""

from cclib.parser.logfilewrapper import FileWrapper
from cclib.parser.molproparser import Molpro


class RepairedMolpro(Molpro):
    """Reads outputs without their heading or with short lists of orbitals, and imaginary modes."""

    def extract(self, inputfile: FileWrapper, line: str) -> None:
        """Read what begins at a line."""
        words = line.strip()
        if words.startswith("ELECTRON ORBITALS"):
            # Not needed here, and Molpro 2018 prints them in a form on which cclib stops.
            return
        if "GRADIENT FOR STATE" in words:
            # Not needed here, and without a geometry before it cclib stops.
            return
        known = len(self.__dict__.get("vibfreqs", ()))
        super().extract(inputfile, line)
        if words.startswith("Normal Modes of imaginary"):
            # Printed, and read, without a sign.
            self.vibfreqs[known:] = [-abs(frequency) for frequency in self.vibfreqs[known:]]
