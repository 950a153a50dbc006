"""What a run did, as plain data and as text."""

from collections.abc import Mapping
from dataclasses import dataclass

KINDS = ("error", "warning", "note", "accepted")
SHOWN = 12
"""How many names a list in the summary shows before it counts the rest."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Summary:
    """What a run did."""

    title: str
    output: str
    delivered: int
    withheld: Mapping[str, tuple[str, ...]]
    """Reasons by reaction."""
    findings: Mapping[str, int]
    """How many by severity; accepted ones count as ``accepted``."""
    computed: Mapping[str, int]
    """Nodes by stage, in the order of the stages."""
    reused: Mapping[str, int]
    renewed: tuple[str, ...] = ()
    """Nodes that were computed although the run before had them."""
    faults: tuple[str, ...] = ()
    """Stages that raised."""
    seconds: float = 0.0

    @property
    def exit_status(self) -> int:
        """0 all delivered, 1 some withheld, 3 a fault of the program."""
        if self.faults:
            return 3
        return 1 if self.withheld else 0

    def text(self) -> str:
        """Write the summary for a person."""
        total = self.delivered + len(self.withheld)
        lines = [self.title] if self.title else []
        lines.append(f"Delivered {self.delivered} of {total} reactions: {self.output}")
        if self.withheld:
            lines.append(f"Withheld {len(self.withheld)}:")
            lines += [f"  {name}: {'; '.join(reasons)}" for name, reasons in self.withheld.items()]
        counted = ", ".join(f"{self.findings[kind]} {kind}" for kind in KINDS if self.findings.get(kind))
        lines.append(f"Findings: {counted or 'none'} (audit.csv)")
        lines += self._stages()
        return "\n".join(lines)

    def _stages(self) -> list[str]:
        computed, reused = sum(self.computed.values()), sum(self.reused.values())
        if not computed:
            return [f"Nothing was computed: all {reused} stages are up to date ({self.seconds:.2f} s)."]
        lines = [f"Stages: {computed} computed, {reused} reused ({self.seconds:.1f} s)"]
        lines += [
            f"  {stage}: {self.computed[stage]} computed, {self.reused[stage]} reused"
            for stage in self.computed
            if self.computed[stage] + self.reused[stage]
        ]
        if self.renewed:
            more = f" and {len(self.renewed) - SHOWN} more" if len(self.renewed) > SHOWN else ""
            lines.append(f"Computed again: {', '.join(self.renewed[:SHOWN])}{more}")
        return lines
