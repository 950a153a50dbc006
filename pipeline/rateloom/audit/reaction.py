"""The members of a reaction against each other: atoms, charge, spin, levels of theory, energies."""

from collections import Counter
from collections.abc import Callable, Sequence

from scipy.constants import N_A, kilo

from rateloom.audit.levels import level_remarks
from rateloom.audit.limits import Limits
from rateloom.audit.members import Member, Members
from rateloom.remarks import Remark


def reaction_remarks(members: Members, limits: Limits | None = None) -> tuple[Remark, ...]:
    """Check one reaction.

    Parameters
    ----------
    members : Members
        Reactants and products once per molecule, in SI units.
    limits : Limits or None
        Thresholds, each in the unit of its name; the defaults where None.

    Returns
    -------
    tuple of Remark
        ``atoms-not-balanced``, ``charge-not-balanced``, ``spin-not-conserved``, ``levels-differ``,
        ``level-not-comparable``, ``programs-differ``, ``program-versions-differ``, ``frequency-scales-differ``,
        ``unusual-frequency-scale``, ``barrier-below-reactants``, ``barrier-below-products``.

    References
    ----------
    .. [1] E. Wigner, E. E. Witmer, Z. Phys. 51 (1928) 859, for the coupling of spins (from memory).
    """
    checks: tuple[Callable[[Members], list[Remark]], ...] = (_atoms, _charge, _spin)
    remarks = [remark for check in checks for remark in check(members)]
    remarks += level_remarks(members, limits or Limits())
    codes = {remark.code for remark in remarks}
    if not codes & {"atoms-not-balanced", "levels-differ"}:
        # Energies of other atoms or another level are no barrier.
        remarks += _barriers(members)
    return tuple(remarks)


def _formula(composition: Counter[str]) -> str:
    return " ".join(f"{element}{count}" for element, count in sorted(composition.items()))


def _atoms(members: Members) -> list[Remark]:
    saddle = Counter(dict(members.saddle.species.composition))
    remarks = []
    for side, molecules in members.sides:
        total: Counter[str] = Counter()
        for molecule in molecules:
            total.update(dict(molecule.species.composition))
        if total != saddle:
            message = (
                f"the {side} hold {_formula(total)}, the saddle {members.saddle.name} holds {_formula(saddle)}: "
                "correct the equation or the transition state"
            )
            remarks.append(Remark("atoms-not-balanced", message, _formula(total), _formula(saddle)))
    return remarks


def _charge(members: Members) -> list[Remark]:
    saddle = members.saddle.species.charge
    remarks = []
    for side, molecules in members.sides:
        total = sum(molecule.species.charge for molecule in molecules)
        if total != saddle:
            message = f"the {side} carry charge {total:+d}, the saddle {members.saddle.name} carries {saddle:+d}"
            remarks.append(Remark("charge-not-balanced", message, f"{total:+d}", f"{saddle:+d}"))
    return remarks


def _spin(members: Members) -> list[Remark]:
    """Check that the spins of each side can couple to that of the saddle (Wigner-Witmer rules)."""
    saddle = members.saddle.species.multiplicity
    remarks = []
    for side, molecules in members.sides:
        possible = {1}
        for molecule in molecules:
            own = molecule.species.multiplicity
            possible = {m for other in possible for m in range(abs(other - own) + 1, other + own, 2)}
        if saddle not in possible:
            listed = ", ".join(str(multiplicity) for multiplicity in sorted(possible))
            message = (
                f"the {side} can have multiplicity {listed}, the saddle {members.saddle.name} has {saddle}: "
                "it belongs to another potential-energy surface"
            )
            remarks.append(Remark("spin-not-conserved", message, str(saddle), listed))
    return remarks


def _barriers(members: Members) -> list[Remark]:
    """Check that the saddle lies above both sides, zero-point energies included."""
    top = members.saddle.species.ground_energy
    remarks = []
    for side, molecules in members.sides:
        barrier = (top - _ground(molecules)) * N_A / kilo
        if barrier < 0.0:
            message = (
                f"with zero-point energies the saddle lies {-barrier:.2f} kJ/mol below the {side}: a complex may lie "
                "before it, and the rate coefficient is then not that of this saddle alone"
            )
            remarks.append(Remark(f"barrier-below-{side}", message, f"{barrier:.2f} kJ/mol", "0 kJ/mol"))
    return remarks


def _ground(molecules: Sequence[Member]) -> float:
    return sum(molecule.species.ground_energy for molecule in molecules)
