"""How a large batch compares: cold, warm, changed, on one worker and two, against what could do no better.

Run ``python tests/benchmarks/scale.py --reactions 1000``; everything is measured side by side in this one run and
printed as ratios. Ninja and GNU time are used where they are installed.
"""

import argparse
import gzip
import os
import shutil
import subprocess
import sys
import tempfile
import time
from collections.abc import Sequence
from pathlib import Path

sys.path.insert(0, str(Path(__file__).parent))

from large_batch import make_batch, shifted

RATELOOM = [sys.executable, "-m", "rateloom"]
ENVIRONMENT = os.environ | {"OMP_NUM_THREADS": "1", "OPENBLAS_NUM_THREADS": "1"}
ONLY_READ = """
import logging, sys
from joblib import Parallel, delayed
def read(path):
    import cclib
    try:
        return cclib.io.ccread(path, loglevel=logging.CRITICAL) is not None
    except Exception:
        return False
print(sum(Parallel(n_jobs=2)(delayed(read)(path) for path in sys.argv[1:])))
"""


def seconds(command: Sequence[str], times: int = 1) -> float:
    """Run a command a few times; the shortest time is the one least disturbed."""
    taken = []
    for _ in range(times):
        begun = time.perf_counter()
        done = subprocess.run(command, capture_output=True, text=True, env=ENVIRONMENT, check=False)
        taken.append(time.perf_counter() - begun)
        if done.returncode not in (0, 1):
            sys.exit(f"{' '.join(command[:4])} ... ended with {done.returncode}: {done.stderr[-500:]}")
    return min(taken)


def age(folder: Path) -> None:
    """Set the files' times back an hour, as those of a finished calculation are."""
    past = time.time() - 3600
    for path in folder.rglob("*"):
        os.utime(path, (past, past))


def ninja_doing_nothing(folder: Path, job: Path) -> float | None:
    """Time ninja over a graph of the same files, up to date."""
    if shutil.which("ninja") is None:
        return None
    files = sorted((job.parent / "calculations").glob("*.gz"))
    build = folder / "ninja"
    build.mkdir()
    rules = ["rule copy", "  command = touch $out"]
    rules += [f"build out/{file.name}.done: copy {file}" for file in files]
    rules += [
        f"build out/{number}.rate: copy out/{one.name}.done out/{other.name}.done"
        for number, (one, other) in enumerate(zip(files[::2], files[1::2], strict=True))
    ]
    (build / "build.ninja").write_text("\n".join(rules) + "\n")
    subprocess.run(["ninja", "-C", str(build), "--quiet"], check=True, capture_output=True)
    return seconds(["ninja", "-C", str(build)], 5)


def recalculate(job: Path, reactions: int) -> None:
    """Change the energy of a saddle on which one reaction depends."""
    path = sorted((job.parent / "calculations").glob("*-energy.out.gz"))[reactions // 2]
    path.write_bytes(gzip.compress(shifted(gzip.decompress(path.read_bytes()).decode(), 1e-4).encode()))
    age(path.parent)
    os.utime(path, (time.time() - 1800, time.time() - 1800))


def row(what: str, against: str, ratio: float, reach: str, times: str) -> None:
    """Print one line of the table."""
    print(f"| {what} | {against} | {ratio:.2f} | {reach} | {times} |", flush=True)


def measure(reactions: int) -> None:
    """Fill in the table."""
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name)
        job = make_batch(folder / "batch", reactions)
        age(folder / "batch")
        files = [str(path) for path in sorted((job.parent / "calculations").glob("*.gz"))]
        print("| what | against | ratio | to reach | seconds |\n| --- | --- | --- | --- | --- |")
        only_read = seconds([sys.executable, "-c", ONLY_READ, *files])
        run = [*RATELOOM, "run", str(job)]
        cold = {n: seconds([*run, "--workers", str(n), "--output", str(folder / f"cold{n}")]) for n in (2, 1)}
        label = f"cold run, {reactions} reactions, 2 workers"
        row(label, "cclib alone, joblib, 2 workers", cold[2] / only_read, "1.15", f"{cold[2]:.1f} / {only_read:.1f}")
        row("cold run, 2 workers", "1 worker", cold[2] / cold[1], "0.55", f"{cold[2]:.1f} / {cold[1]:.1f}")
        warm_run = [*run, "--output", str(folder / "cold2")]
        seconds(warm_run)
        warm = seconds(warm_run, 5)
        ninja = ninja_doing_nothing(folder, job)
        if ninja is not None:
            row("second run, nothing changed", "ninja doing nothing", warm / ninja, "10", f"{warm:.3f} / {ninja:.3f}")
        recalculate(job, reactions)
        changed = seconds(warm_run)
        row("one energy recalculated", "the second run", changed / warm, "3", f"{changed:.2f} / {warm:.3f}")
        nothing = seconds([sys.executable, "-c", "pass"], 5)
        helped = seconds([*RATELOOM, "--help"], 5)
        row("rateloom --help", "python -c pass", helped / nothing, "8", f"{helped:.3f} / {nothing:.3f}")


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--reactions", type=int, default=1000)
    measure(parser.parse_args().reactions)


if __name__ == "__main__":
    main()
