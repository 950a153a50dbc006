"""Repairs of cclib's reader of GAMESS."""

from cclib.parser.gamessparser import GAMESS
from cclib.parser.logfilewrapper import FileWrapper

OF_MODES = ("vibfreqs", "vibdisps", "vibirs", "vibramans", "vibsyms", "vibrmasses", "vibfconsts")


class RepairedGAMESS(GAMESS):
    """Reads a second set of frequencies in one file."""

    def extract(self, inputfile: FileWrapper, line: str) -> None:
        """Read what begins at a line."""
        if "NORMAL COORDINATE ANALYSIS IN THE HARMONIC APPROXIMATION" in line:
            # cclib would go on with the former set, which it has turned into an array, and stop.
            for name in OF_MODES:
                self.__dict__.pop(name, None)
        super().extract(inputfile, line)
