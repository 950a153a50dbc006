"""Repairs of cclib's reader of NWChem."""

from cclib.parser.logfilewrapper import FileWrapper
from cclib.parser.nwchemparser import NWChem

SEARCH_SETTINGS = ("fixed trust radius", "no constraints", "maximum gradient threshold")


class RepairedNWChem(NWChem):
    """Reads saddle searches, and the energy of a task that follows an optimisation."""

    def extract(self, inputfile: FileWrapper, line: str) -> None:
        """Read what begins at a line."""
        words = line.strip()
        if words == "NWChem Geometry Optimization":
            # A saddle search prints its trust radius first, where an assertion expects the thresholds. These are
            # not needed: convergence is printed.
            return
        if words in ("NWChem Input Module", "NWChem Nuclear Hessian and Frequency Analysis"):
            # Line searches go without a geometry; cclib would skip the energies of all later tasks with them.
            self.linesearch = False
        if line[:1] == "@" or (line[2:6] == "Step" and "Energy" in line):
            # Steps are counted across tasks, where an assertion stops at the second search.
            return
        if "MASS-WEIGHTED NUCLEAR HESSIAN" in line:
            # The last row of a width of 10 n + 1 is left unread; our own reader takes the whole.
            return
        if words == "Optimization converged":
            return
        super().extract(inputfile, line)
