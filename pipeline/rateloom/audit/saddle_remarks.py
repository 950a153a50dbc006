"""Remarks about the imaginary mode of a saddle: what was found, what it was held against, what to do."""

from rateloom.remarks import Remark

# Usual magnitudes of imaginary frequencies [cm-1]: common practice, no law; outside them a look is worth while.
USUAL = {
    "bonds of hydrogen": (200.0, 3000.0),
    "bonds of heavy atoms": (50.0, 1500.0),
    "internal rotation": (30.0, 1200.0),
    "inversion": (50.0, 2000.0),
    "bending": (50.0, 2000.0),
}


def imaginary(frequency_per_cm: float) -> str:
    """Write an imaginary frequency, given negative, e.g. ``1422i cm-1``."""
    return f"{-frequency_per_cm:.0f}i cm-1"


def mode_not_printed(frequency_per_cm: float, expected: str) -> Remark:
    """Say that nobody can tell what moves."""
    return Remark(
        "mode-not-printed",
        "the output prints neither the displacements of its imaginary mode nor a Hessian, so nothing shows that the "
        f"mode belongs to the reaction (expected {expected or 'unknown'}): print the normal modes or look at them",
        value=imaginary(frequency_per_cm),
    )


def confirmed(frequency_per_cm: float, kind: str, expected: str, moved: str, share: float) -> Remark:
    """Show the evidence for a mode that belongs to the reaction."""
    return Remark(
        "imaginary-mode-confirmed",
        f"the imaginary mode ({imaginary(frequency_per_cm)}) leads to the reactants one way and to the products the "
        f"other ({kind}): it moves {moved}; expected {expected}",
        value=f"share {share:.2f}",
        limit=expected,
    )


def off_reaction(frequency_per_cm: float, moved: str, expected: str, share: float) -> Remark:
    """Say that the mode is another motion."""
    return Remark(
        "imaginary-mode-off-reaction",
        f"the imaginary mode ({imaginary(frequency_per_cm)}) moves {moved}; expected {expected or 'another motion'}: "
        "take the saddle of this reaction, or correct the equation",
        value=f"share {share:.2f}",
        limit=expected,
    )


def inconclusive(frequency_per_cm: float, moved: str, expected: str, missing: str, share: float) -> Remark:
    """Say what is missing for a verdict."""
    return Remark(
        "imaginary-mode-inconclusive",
        f"whether the imaginary mode ({imaginary(frequency_per_cm)}) belongs to the reaction is open: {missing}; it "
        f"moves {moved}, expected {expected or 'unknown'}: follow the path to both sides",
        value=f"share {share:.2f}",
        limit=expected,
    )


def small(frequency_per_cm: float, limit_per_cm: float, verdict: str) -> Remark:
    """Say that the mode is softer than the threshold of a reaction coordinate."""
    return Remark(
        "small-imaginary-mode",
        f"the imaginary frequency of the saddle ({imaginary(frequency_per_cm)}) is below the threshold of a reaction "
        f"coordinate; by its motion it is {verdict}: tighten the optimisation and the grid, or accept it for a loose "
        "saddle",
        value=imaginary(frequency_per_cm),
        limit=f"{limit_per_cm:g} cm-1",
    )


def unusual(frequency_per_cm: float, kind: str) -> tuple[Remark, ...]:
    """Say that the magnitude is uncommon for the kind of motion, a key of the table above; empty where usual."""
    low, high = USUAL[kind]
    if low <= -frequency_per_cm <= high:
        return ()
    side = "low" if -frequency_per_cm < low else "high"
    return (
        Remark(
            "imaginary-mode-unusual",
            f"an imaginary frequency of {imaginary(frequency_per_cm)} is {side} for a motion of the kind '{kind}' "
            "(common practice, no law): tunnelling factors hang on it, so check level of theory and geometry",
            value=imaginary(frequency_per_cm),
            limit=f"{low:g} to {high:g} cm-1",
        ),
    )
