"""Repairs of cclib's reader of GAMESS."""

from cclib.parser.gamessparser import GAMESS
from cclib.parser.logfilewrapper import FileWrapper

OF_MODES = ("vibfreqs", "vibdisps", "vibirs", "vibramans", "vibsyms", "vibrmasses", "vibfconsts")
OF_SEARCH = ("optdone", "geovalues", "geotargets")


class RepairedGAMESS(GAMESS):
    """Reads a second run in one file."""

    def extract(self, inputfile: FileWrapper, line: str) -> None:
        """Read what begins at a line."""
        if "NORMAL COORDINATE ANALYSIS IN THE HARMONIC APPROXIMATION" in line:
            # cclib would go on with the former set, which it has turned into an array, and stop.
            self.forget(OF_MODES)
        if "GAMESS VERSION =" in line:
            # A search that ended in an earlier run keeps cclib from reading further geometries.
            self.forget(OF_SEARCH)
        super().extract(inputfile, line)

    def forget(self, names: tuple[str, ...]) -> None:
        """Drop what was found earlier in the file."""
        for name in names:
            self.__dict__.pop(name, None)
