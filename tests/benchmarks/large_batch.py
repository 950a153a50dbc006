"""Make a job of any number of reactions from the demo's real outputs, every file with a content of its own.

Each reaction gets its own saddle: copies of a real frequency file and a real energy file, with every energy in them
shifted by a few microhartree, so that each file is really read and each rate coefficient differs. The species are
the demo's.
"""

import gzip
import re
from pathlib import Path

import yaml

ROOT = Path(__file__).resolve().parents[2]
CALCULATIONS = ROOT / "sample_outputs" / "calculations"
ENERGY_LINES = re.compile(r"(?m)^(.*(?:Total DFT energy|CCSD\(T\) total energy).*?)(-\d+\.\d+)(.*)$")
STEP = 1.0e-6
"""Hartree between one copy and the next: 0.1 % of a rate coefficient at 300 K."""


def shifted(text: str, shift: float) -> str:
    """Shift every total energy of an output, keeping its printed digits."""

    def move(match: re.Match[str]) -> str:
        before, number, after = match.groups()
        return f"{before}{float(number) + shift:.{len(number.split('.')[1])}f}{after}"

    text, count = ENERGY_LINES.subn(move, text)
    if not count:
        msg = "no energy line to shift"
        raise ValueError(msg)
    return text


def make_batch(folder: Path, reactions: int) -> Path:
    """Write a job of some reactions with two files each into an empty folder; give the path of its job file."""
    demo = yaml.load((ROOT / "configs" / "cofiring.yaml").read_text(), yaml.BaseLoader)
    (folder / "calculations").mkdir(parents=True)
    templates = sorted(demo["reactions"].items())
    texts = {
        name: {
            kind: gzip.decompress((CALCULATIONS / entry[kind]).read_bytes()).decode()
            for kind in ("frequencies", "energy")
        }
        for name, entry in demo["transition_states"].items()
    }
    job = {
        "title": f"{reactions} reactions",
        "output": "tables",
        "temperatures": demo["temperatures"],
        "defaults": demo["defaults"],
        "species": {name: _in_demo(entry) for name, entry in demo["species"].items()},
        "transition_states": {},
        "reactions": {},
    }
    for number in range(reactions):
        name, reaction = templates[number % len(templates)]
        saddle, label = reaction["transition_state"], f"{name}-{number}"
        entry = dict(demo["transition_states"][saddle])
        for kind, text in texts[saddle].items():
            file = folder / "calculations" / f"{label}-{kind}.out.gz"
            file.write_bytes(gzip.compress(shifted(text, STEP * (number + 1)).encode(), 1, mtime=0))
            entry[kind] = f"calculations/{file.name}"
        job["transition_states"][f"ts-{label}"] = entry
        job["reactions"][label] = {**reaction, "transition_state": f"ts-{label}"}
    path = folder / "job.yaml"
    path.write_text(yaml.dump(job, sort_keys=False))
    return path


def _in_demo(entry: dict[str, object]) -> dict[str, object]:
    """Point the files of a species at the demo's folder."""
    files = {key: str(CALCULATIONS / str(entry[key])) for key in ("frequencies", "energy") if key in entry}
    return {**entry, **files}
