"""Repairs of cclib's reader of NWChem."""

from cclib.parser.logfilewrapper import FileWrapper
from cclib.parser.nwchemparser import NWChem

NOT_READ = (
    # A saddle search prints its trust radius first, where an assertion expects the thresholds.
    "NWChem Geometry Optimization",
    # Convergence is told by its own line; cclib counts steps here, and none are left after the repair above.
    "Optimization converged",
    # A restart without a geometry has no atoms to hang a basis set on.
    'Summary of "ao basis"',
    'Basis "ao basis"',
    # Its iterations have a column more than cclib unpacks.
    "Quadratically convergent ROHF",
    # The last row of a matrix of 10 n + 1 rows is left out; our own reader takes the whole.
    "MASS-WEIGHTED NUCLEAR HESSIAN",
)
"""Blocks that stop cclib on good outputs and hold nothing that is needed of it."""
TASKS = ("NWChem Input Module", "NWChem Nuclear Hessian and Frequency Analysis")


class RepairedNWChem(NWChem):
    """Reads saddle searches, several tasks, and restarts."""

    def extract(self, inputfile: FileWrapper, line: str) -> None:
        """Read what begins at a line."""
        words = line.strip()
        if words in TASKS:
            # Line searches go without a geometry; cclib would skip the energies of all later tasks with them.
            self.linesearch = False
        if words.startswith(NOT_READ):
            return
        if line[:1] == "@" or (line[2:6] == "Step" and "Energy" in line):
            # Steps are counted across tasks, where an assertion stops at the second search.
            return
        super().extract(inputfile, line)
