"""One level of theory, one program and one pair of scale factors for all members of a reaction."""

import re
from collections.abc import Iterable, Mapping, Sequence

from rateloom.audit.limits import Limits
from rateloom.audit.members import UNKNOWN_LEVEL, Members, Origin
from rateloom.remarks import Remark


def level_remarks(members: Members, limits: Limits) -> list[Remark]:
    """Check that the members of a reaction can be compared.

    Parameters
    ----------
    members : Members
        Reactants, products and saddle.
    limits : Limits
        Thresholds, each in the unit of its name.

    Returns
    -------
    list of Remark
        ``levels-differ``, ``level-not-comparable``, ``programs-differ``, ``program-versions-differ``,
        ``frequency-scales-differ``, ``unusual-frequency-scale``.

    References
    ----------
    .. [1] A. P. Scott, L. Radom, J. Phys. Chem. 100, 16502 (1996), for scale factors in use.
    """
    return [*_levels(members), *_programs(members), *_scales(members, limits)]


def _origins(members: Members) -> tuple[tuple[str, list[tuple[str, Origin]]], ...]:
    """Where the geometries and the energies come from, with the names of the members."""
    return (
        ("geometries and frequencies", [(m.name, m.geometry) for m in members.all if m.geometry is not None]),
        ("energies", [(m.name, m.energy) for m in members.all]),
    )


def _levels(members: Members) -> list[Remark]:
    """Check that geometries have one level of theory and energies one."""
    remarks = []
    for what, origins in _origins(members):
        by_level = _grouped((origin.level, name) for name, origin in origins if origin.comparable)
        if len(by_level) > 1:
            message = f"the level of theory of the {what} differs ({_listed(by_level)}): recalculate the odd one out"
            remarks.append(Remark("levels-differ", message, "; ".join(by_level), "one level"))
        in_words = [(name, origin) for name, origin in origins if not origin.comparable]
        others = _grouped((origin.level, name) for name, origin in in_words)
        alike = {_plain(level) for level in (*by_level, *others)}
        if others and (len(alike) > 1 or _plain(UNKNOWN_LEVEL) in alike):
            message = (
                f"whether the {what} of all members are of one level of theory cannot be told "
                f"({_listed(by_level | others)}): compare them by eye"
            )
            remarks.append(Remark("level-not-comparable", message, "; ".join(others), "one level"))
    return remarks


def _grouped(pairs: Iterable[tuple[str, str]]) -> dict[str, list[str]]:
    """Names by what they have in common, whose spelling does not matter; ascending, each name once."""
    spelling: dict[str, str] = {}
    groups: dict[str, dict[str, None]] = {}
    for common, name in pairs:
        groups.setdefault(spelling.setdefault(_plain(common), common), {})[name] = None
    return {common: list(groups[common]) for common in sorted(groups)}


def _plain(name: str) -> str:
    return re.sub(r"\s+", "", name).casefold()


def _listed(groups: Mapping[str, Sequence[str]]) -> str:
    return "; ".join(f"{common}: {', '.join(names)}" for common, names in groups.items())


def _programs(members: Members) -> list[Remark]:
    """Programs differ in integration grids and in what they mean by a functional; their versions seldom."""
    remarks = []
    for what, origins in _origins(members):
        printed = [(name, origin) for name, origin in origins if origin.program not in ("", "given")]
        programs = _grouped((origin.program, name) for name, origin in printed)
        if len(programs) > 1:
            message = (
                f"the {what} of the members are from different programs ({_listed(programs)}), which may define one "
                "functional or one reference differently: take one program, or show that they agree for a member"
            )
            remarks.append(Remark("programs-differ", message, "; ".join(programs), "one program"))
        for program in programs:
            versions = _grouped(
                (origin.version or "unknown", name)
                for name, origin in printed
                if _plain(origin.program) == _plain(program)
            )
            if len(versions) > 1:
                message = f"the {what} of the members are from different versions of {program} ({_listed(versions)})"
                remarks.append(Remark("program-versions-differ", message, "; ".join(versions), "one version"))
    return remarks


def _scales(members: Members, limits: Limits) -> list[Remark]:
    """Check the scale factors of frequencies: usual ones, and the same for all."""
    low, high = limits.lowest_frequency_scale_ratio, limits.highest_frequency_scale_ratio
    scaled = [member for member in members.all if member.geometry is not None]
    used = _grouped((f"{m.frequency_scale.zero_point:g} and {m.frequency_scale.modes:g}", m.name) for m in scaled)
    remarks = []
    if len(used) > 1:
        message = (
            "the scale factors (of zero-point energy and of modes) differ within the reaction "
            f"({_listed(used)}): one level of theory has one pair of them"
        )
        remarks.append(Remark("frequency-scales-differ", message, "; ".join(used), "one pair"))
    for what, factors in (
        ("zero-point energy", {member.frequency_scale.zero_point for member in scaled}),
        ("modes", {member.frequency_scale.modes for member in scaled}),
    ):
        for factor in sorted(factors):
            if not low <= factor <= high:
                message = f"the scale factor {factor:g} of the {what} lies outside those in use: check it"
                remarks.append(Remark("unusual-frequency-scale", message, f"{factor:g}", f"{low:g} to {high:g}"))
    return remarks
