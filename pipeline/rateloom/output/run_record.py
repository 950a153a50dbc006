"""``run.json``: what went in, by which versions, and what was computed; no time, no machine."""

import json
import platform
from collections.abc import Mapping
from importlib.metadata import version
from os.path import relpath
from pathlib import Path

from rateloom import __version__

LIBRARIES = ("cclib", "numpy", "scipy", "periodictable")
"""Those whose version can change a number."""


def provenance(
    title: str,
    job: str,
    hashes: Mapping[str, bytes],
    computed: Mapping[str, int],
    reused: Mapping[str, int],
) -> bytes:
    """Write ``run.json``.

    Parameters
    ----------
    title
        Of the job.
    job
        Absolute path of the job file; every path is written relative to its folder.
    hashes
        SHA-256 of each file read, by absolute path; empty for one that could not be read.
    computed, reused
        Nodes by stage.
    """
    folder = Path(job).parent
    versions = {"rateloom": __version__, "python": platform.python_version()}
    versions |= {name: version(name) for name in LIBRARIES}
    content = {
        "job": {"title": title, "file": Path(job).name},
        "versions": versions,
        "inputs": [{"file": relpath(path, folder), "sha256": hashes[path].hex() or None} for path in sorted(hashes)],
        "stages": {stage: {"computed": computed[stage], "reused": reused[stage]} for stage in computed},
    }
    return json.dumps(content, indent=1, ensure_ascii=False).encode() + b"\n"
