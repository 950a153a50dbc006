"""What an imaginary mode says about a reaction: held against the bonds, angles and torsions that must change."""

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from rateloom.arrays import FloatArray
from rateloom.audit.saddle_mode import ImaginaryMode
from rateloom.audit.saddle_words import bonds_that_move
from rateloom.molecule import (
    Bond,
    Motion,
    Rearrangement,
    ShapeChange,
    bonds,
    leading_motion,
    motion_share,
    sides,
    stretch_gradients,
    stretch_rates,
)

CLEAR_SHARE = 0.4  # of the kinetic energy of the mode: enough alone
LEAST_SHARE = 0.1  # enough where reactants and products appear on the two sides; below it the mode is another motion
SHAPE_SHARE = 0.35  # of a mode that changes the shape alone
CONCERTED = 0.6  # (with - against) / (with + against): how far the bonds that break and form move together
OPPOSED = 0.3  # below it they cancel
LAGGING = 0.15  # of the fastest changing bond; without both sides in sight every one must move at least so fast ...
SLIPPING = 0.05  # ... or not backwards faster than this, where it joins the leading bond and follows it later
ELSEWHERE = 2.0  # times the share of the changing bonds: then another motion leads
ASTRAY = 0.3  # of the fastest changing bond: a bond of neither side that moves so fast belongs to another reaction
TINY = float(np.finfo(float).tiny)


@dataclass(frozen=True, slots=True)
class Evidence:
    """A verdict with its grounds."""

    verdict: str
    """``confirmed``, ``inconclusive`` or ``off-reaction``."""
    share: float
    """Of the kinetic energy of the mode in the expected motion [1]."""
    moved: str
    """What the mode moves, in words."""
    missing: str = ""
    """What keeps an inconclusive verdict from being more."""


def bond_evidence(atoms: Sequence[str], geometry: FloatArray, mode: ImaginaryMode, change: Rearrangement) -> Evidence:
    """Hold a mode against the bonds that change.

    Parameters
    ----------
    atoms
        Element symbols.
    geometry
        Of the saddle, shape (n_atoms, 3) [angstrom].
    mode
        Its imaginary mode.
    change
        The bonds that break and form; at least one.

    Returns
    -------
    Evidence
        Confirmed where the bonds move together and either both sides of the reaction appear along the mode or the
        mode is clearly theirs.
    """
    motion = _BondMotion(atoms, geometry, mode, change)
    if motion.together >= CONCERTED and (
        (motion.share >= LEAST_SHARE and motion.connects)
        or (motion.share >= CLEAR_SHARE and not motion.strangers and motion.led_by_changing_bonds)
    ):
        return Evidence("confirmed", motion.share, bonds_that_move(atoms, change, motion.rates))
    moved = motion.leading.words
    if not motion.connects and motion.is_another:
        return Evidence("off-reaction", motion.share, moved)
    if motion.together < CONCERTED:
        return Evidence("inconclusive", motion.share, moved, "the bonds that change do not move together")
    missing = "the bonds that change move little, or reactants and products do not appear on its two sides"
    return Evidence("inconclusive", motion.share, moved, missing)


def shape_evidence(atoms: Sequence[str], geometry: FloatArray, mode: ImaginaryMode, shape: ShapeChange) -> Evidence:
    """Hold a mode against the angles and torsions in which reactant and product differ from the saddle.

    Parameters
    ----------
    atoms
        Element symbols.
    geometry
        Of the saddle, shape (n_atoms, 3) [angstrom].
    mode
        Its imaginary mode.
    shape
        What has to move, and the share of the mode in it.

    Returns
    -------
    Evidence
        Confirmed where the mode moves it towards the reactant on one side and the product on the other.
    """
    moved = leading_motion(atoms, geometry, mode.displacement, mode.masses).words
    if not shape.moving:
        missing = "no angle or torsion tells the saddle from reactants and products"
    elif shape.share < LEAST_SHARE:
        return Evidence("off-reaction", shape.share, moved)
    elif shape.share < SHAPE_SHARE:
        missing = "the expected motion is a small part of the mode"
    elif not shape.opposite:
        missing = "reactants and products lie on the same side of the saddle along the mode"
    else:
        return Evidence("confirmed", shape.share, moved)
    return Evidence("inconclusive", shape.share, moved, missing)


def unread_evidence(
    atoms: Sequence[str],
    geometry: FloatArray,
    mode: ImaginaryMode,
    *,
    same_atoms: bool,
    complete: bool,
    expected: str,
) -> Evidence:
    """Judge a mode where reactants and products were not both found in the saddle.

    Parameters
    ----------
    atoms
        Element symbols.
    geometry
        Of the saddle, shape (n_atoms, 3) [angstrom].
    mode
        Its imaginary mode.
    same_atoms
        Whether the saddle has the atoms of reactants and products.
    complete
        Whether the search tried every choice.
    expected
        Bonds that the reaction changes, in words; empty where unknown.

    Returns
    -------
    Evidence
        Never confirmed.
    """
    leading = leading_motion(atoms, geometry, mode.displacement, mode.masses)
    if not same_atoms:
        if leading.kind != "stretch" and expected:  # it changes no bond, whatever the atoms
            return Evidence("off-reaction", 0.0, leading.words)
        missing = "the atoms of reactants, saddle and products are not the same"
        return Evidence("inconclusive", 0.0, leading.words, missing)
    if not complete:
        missing = "the search for the bonds that change reached its limit"
        return Evidence("inconclusive", 0.0, leading.words, missing)
    return Evidence("off-reaction", 0.0, leading.words)


class _BondMotion:
    """How the bonds of a reaction move along a mode; what only doubtful cases need is computed when asked for."""

    def __init__(
        self, atoms: Sequence[str], geometry: FloatArray, mode: ImaginaryMode, change: Rearrangement
    ) -> None:
        self._atoms, self._geometry, self._mode, self._change = atoms, geometry, mode, change
        self.share = motion_share(mode.displacement, mode.masses, stretch_gradients(geometry, change.changed))
        self.rates = stretch_rates(geometry, mode.displacement, change.changed)
        progress = self.rates * np.array([1.0] * len(change.broken) + [-1.0] * len(change.formed))
        self._forward = 1.0 if progress.sum() >= 0 else -1.0
        self.together = float(abs(progress.sum()) / max(np.abs(progress).sum(), TINY))
        self._relative = progress * self._forward / max(float(np.abs(progress).max()), TINY)

    @cached_property
    def connects(self) -> bool:
        """Whether the molecules of the one side appear backwards and those of the other side forwards."""
        mode, change = self._mode.displacement * self._forward, self._change
        wanted = (change.reactant_bonds, change.product_bonds)
        forward, backward = sides(self._atoms, self._geometry, mode, wanted)
        # An early saddle still looks like the reactants on both sides, a late one like the products.
        return backward[0] and forward[1] and not (forward[0] and backward[1])

    @cached_property
    def leading(self) -> Motion:
        return leading_motion(self._atoms, self._geometry, self._mode.displacement, self._mode.masses)

    @cached_property
    def _plain(self) -> frozenset[Bond]:
        return bonds(self._atoms, self._geometry)

    @cached_property
    def strangers(self) -> tuple[Bond, ...]:
        """Bonds of the saddle that neither reactants nor products have."""
        return tuple(sorted(self._plain - self._change.reactant_bonds - self._change.product_bonds))

    @property
    def led_by_changing_bonds(self) -> bool:
        """Whether a changing bond leads and the others move along or, as bonds of the saddle, follow later."""
        leader = set(self.leading.atoms)
        return self.leading.atoms in self._change.changed and all(
            rate >= LAGGING or (rate >= -SLIPPING and bond in self._plain and leader & set(bond))
            for bond, rate in zip(self._change.changed, self._relative, strict=True)
        )

    @property
    def is_another(self) -> bool:
        """Whether the mode is some other motion than the change of these bonds."""
        if self.share < LEAST_SHARE or self.together < OPPOSED:
            return True
        if self.leading.atoms not in self._change.changed and self.leading.share > ELSEWHERE * self.share:
            return True
        strange = np.abs(stretch_rates(self._geometry, self._mode.displacement, self.strangers))
        return bool(strange.max(initial=0.0) > ASTRAY * np.abs(self.rates).max())
