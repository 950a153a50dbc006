"""Every finding code with its severity; what each means for a rate stands in FINDINGS.md beside this file."""

from types import MappingProxyType

SEVERITIES = ("error", "warning", "note")
"""From the gravest: an error withholds what depends on it."""

_ERRORS = (
    "atoms-not-balanced",
    "calculation-not-readable",
    "charge-not-balanced",
    "connectivity-differs",
    "electron-count-differs",
    "frequencies-at-another-geometry",
    "frequency-implausible",
    "geometries-differ",
    "imaginary-mode-in-minimum",
    "imaginary-mode-off-reaction",
    "isotope-not-known",
    "isotopes-need-normal-modes",
    "levels-differ",
    "no-energy",
    "no-frequencies",
    "no-imaginary-mode",
    "no-rate",
    "not-converged",
    "program-fault",
    "second-imaginary-mode",
    "spin-not-conserved",
    "unfinished-calculation",
    "wrong-number-of-modes",
)
_WARNINGS = (
    "above-collision-limit",
    "accept-matches-nothing",
    "barrier-below-products",
    "barrier-below-reactants",
    "composite-energy-not-taken",
    "curvature-not-carried",
    "cycle-does-not-close",
    "energies-out-of-order",
    "file-used-twice",
    "frequency-scales-differ",
    "imaginary-mode-inconclusive",
    "mode-not-printed",
    "molecule-in-pieces",
    "multiplicity-corrected",
    "no-eckart-barrier",
    "no-fine-structure-data",
    "not-the-ground-term",
    "optical-isomers-differ",
    "poor-fit",
    "prefactor-out-of-range",
    "programs-differ",
    "reaction-twice",
    "residual-gradient",
    "rotational-constants-differ",
    "same-geometry-twice",
    "small-imaginary-mode",
    "soft-mode",
    "spin-contamination",
    "symmetry-number-differs",
    "symmetry-number-uncertain",
    "temperatures-not-fitted",
    "too-few-temperatures",
    "unusual-frequency-scale",
    "wigner-beyond-validity",
)
_NOTES = (
    "charge-not-printed",
    "fine-structure-available",
    "frequencies-from-hessian",
    "imaginary-mode-confirmed",
    "imaginary-mode-unusual",
    "isotopes-from-output",
    "large-tunnelling-factor",
    "level-not-comparable",
    "masses-not-isotopic",
    "modes-recalculated",
    "point-group-broken-by-noise",
    "program-versions-differ",
    "several-jobs",
    "several-saddles",
    "soft-modes-decide-rate",
    "too-slow-to-matter",
)

CODES: MappingProxyType[str, str] = MappingProxyType(
    dict.fromkeys(_ERRORS, "error") | dict.fromkeys(_WARNINGS, "warning") | dict.fromkeys(_NOTES, "note")
)
"""Severity by code, unless the job file sets another one."""
