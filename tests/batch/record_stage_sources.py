"""Record the sources of all stages: run this when a stage is new, has a new version, or changed without effect.

Not for a stage whose results may differ: that one needs a new version first.
"""

import sys
from pathlib import Path

HERE = Path(__file__).resolve().parent
sys.path.insert(0, str(HERE))

from stage_sources import Sources, describe, differences, load, save, table  # noqa: E402

RECORD = HERE / "stage_sources.json"


def main() -> None:
    """Say what changed and write the record."""
    sources = Sources(HERE.parents[1] / "pipeline", "rateloom", left_out=("rateloom.engine",))
    now = describe(table("rateloom.batch.stages:STAGES"), sources)
    print("\n".join(differences(load(RECORD), now)) or "nothing changed")
    save(RECORD, now)


if __name__ == "__main__":
    main()
