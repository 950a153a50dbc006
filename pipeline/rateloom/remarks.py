"""What a stage has to say about its input: a value, never an exception.

A remark does not know its subject or its severity; the audit adds both and makes a finding of it. It names no
file path and no time, so that equal inputs give equal remarks.
"""

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Remark:
    """One thing noticed about a calculation, a species, a saddle, a reaction, a rate or a fit."""

    code: str
    """A code of the audit's table, e.g. ``second-imaginary-mode``."""
    message: str
    """One sentence for a chemist: what was found and what to do."""
    value: str = ""
    """The number or word found, with its unit."""
    limit: str = ""
    """What it was held against, with its unit."""
