"""Molpro outputs: imaginary modes, which cclib reads as real ones."""

from rateloom.calculation.repairs.molpro import RepairedMolpro
from rateloom.calculation.track import Lines

# The layout that cclib's reader expects; the real outputs at hand hold no frequencies.
MODES = """\
 Normal Modes

                                1 A1        2 B2
 Wavenumbers [cm-1]          1649.20     3942.10
 Intensities [km/mol]          66.70       45.10


 Normal Modes of imaginary frequencies

                                1 A1
 Wavenumbers [cm-1]          1512.30
 Intensities [km/mol]         110.20


"""


def test_imaginary_modes_have_a_sign() -> None:
    source = Lines(enumerate(MODES.splitlines(keepends=True), start=1))
    reader = RepairedMolpro(source, loglevel=100)
    reader.before_parsing()

    for line in source:
        reader.extract(source, line)

    assert reader.vibfreqs == [1649.2, 3942.1, -1512.3]
