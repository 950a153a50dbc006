#!/usr/bin/env python3
"""Regenerate the demo calculations: NWChem DFT files and Psi4 CCSD(T) files.

Every entry of ``calculations.yaml`` becomes one NWChem output (geometry and
harmonic frequencies) and one Psi4 output (CCSD(T) energy at the geometry NWChem
ended with).  A file that is already in the output folder is not made again, so
a stopped run is continued by starting the same command once more.

Needs ``nwchem``, ``psi4`` and ``gzip`` on the PATH, Python >= 3.11 and PyYAML.
"""

from __future__ import annotations

import argparse
import gzip
import math
import os
import re
import shutil
import subprocess
import sys
import tempfile
import threading
from collections.abc import Iterable, Sequence
from concurrent.futures import ThreadPoolExecutor
from dataclasses import dataclass, replace
from pathlib import Path

import yaml

HERE = Path(__file__).resolve().parent
IMAGINARY_BELOW = -20.0  # cm-1; NWChem prints imaginary modes as negative numbers
Atom = tuple[str, float, float, float]


class CalculationError(Exception):
    """One calculation could not be made; the others go on."""


@dataclass(frozen=True)
class Level:
    """The one pair of levels of theory all calculations share."""

    functional: str
    basis: str
    grid: str
    start_grid: str
    start_basis: str
    energy_basis: str


@dataclass(frozen=True)
class Calculation:
    """One entry of the table."""

    name: str
    kind: str  # atom, minimum or saddle
    multiplicity: int
    charge: int
    geometry: str
    folder: str = ""
    symmetry: str = ""
    max_steps: int = 60
    tasks: tuple[str, ...] = ()
    dft: bool = True
    energy: bool = True
    imaginary_modes: int = 0
    truncated_from: str = ""
    cartesian: bool = False
    driver: str = ""
    energy_options: str = ""


def read_table(path: Path) -> tuple[Level, list[Calculation]]:
    """Read the levels of theory and the calculations, in file order."""
    document = yaml.safe_load(path.read_text(encoding="utf-8"))
    level = Level(**document["level"])
    calculations: list[Calculation] = []
    for name, entry in document["calculations"].items():
        fields = dict(entry)
        kind = fields["kind"]
        fields.setdefault("charge", 0)
        fields.setdefault("geometry", "")
        fields.setdefault("imaginary_modes", 1 if kind == "saddle" else 0)
        fields.setdefault("dft", kind != "atom")
        fields["tasks"] = tuple(fields.get("tasks", ()))
        calculations.append(Calculation(name=name, **fields))
    return level, calculations


def nwchem_input(level: Level, calc: Calculation) -> str:
    """Return the NWChem input: all jobs of one species in one file."""
    options = "units angstrom"
    if calc.symmetry or calc.cartesian or calc.kind in ("saddle", "guess"):
        options += " noautoz"
    if not calc.symmetry:
        options += " noautosym"
    geometry = calc.geometry.strip("\n")
    if calc.symmetry:
        geometry = f"symmetry {calc.symmetry}\n{geometry}"
    spin = f"  odft\n  mult {calc.multiplicity}\n" if calc.multiplicity > 1 else ""
    default_tasks = ("saddle", "freq") if calc.kind == "saddle" else ("optimize", "freq")
    tasks = list(calc.tasks or default_tasks)
    lines = [
        f'start {calc.name}\ntitle "{calc.name}"\nmemory total 1500 mb\ncharge {calc.charge}',
        f"geometry {options}\n{geometry}\nend",
        f"basis spherical\n  * library {level.basis}\nend",
        f"dft\n{spin}  xc {level.functional}\n  grid {level.grid}\n"
        "  convergence energy 1e-8 density 1e-6 gradient 1e-5\n  iterations 100\nend",
    ]
    hessian = "  inhess 2\n" if calc.kind == "saddle" else ""
    if tasks[0] == "hessian":
        # The Hessian of the guess only starts the search: a loose one does.
        lines.append(f"dft\n  grid {level.start_grid}\nend\nset cphf:thresh 1.0d-2")
        lines.append(f"task dft hessian\ndft\n  grid {level.grid}\nend\nset cphf:thresh 1.0d-4")
        tasks = tasks[1:]
    lines.append(
        f"driver\n{hessian}  gmax 0.00003\n  grms 0.00002\n  xmax 0.0006\n  xrms 0.0004\n"
        f"  maxiter {calc.max_steps}\n{calc.driver}end"
    )
    lines += [f"task dft {task}" for task in tasks]
    return "\n".join(lines) + "\n"


def guess_input(level: Level, calc: Calculation) -> str:
    """Return the NWChem input for a cheap Hessian of a saddle's guess geometry."""
    small = replace(level, basis=level.start_basis, grid=level.start_grid)
    text = nwchem_input(small, replace(calc, kind="guess", tasks=("hessian",)))
    return re.sub(r"driver\n.*?\nend\n", "", text, flags=re.DOTALL)


def psi4_input(level: Level, calc: Calculation, atoms: Sequence[Atom]) -> str:
    """Return the Psi4 input for the energy at exactly the given geometry."""
    rows = "\n".join(f"  {s:<2s} {x:14.8f} {y:14.8f} {z:14.8f}" for s, x, y, z in atoms)
    reference = "uhf" if calc.multiplicity > 1 else "rhf"
    return (
        f"# {calc.name}: energy at the geometry of the frequencies\n"
        "memory 3 gb\n\n"
        f"molecule {calc.name} {{\n  {calc.charge} {calc.multiplicity}\n{rows}\n"
        "  units angstrom\n  no_com\n  no_reorient\n}\n\n"
        f"set {{\n  basis {level.energy_basis}\n  reference {reference}\n  freeze_core true\n"
        "  scf_type pk\n  e_convergence 1e-8\n  d_convergence 1e-8\n  r_convergence 1e-6\n"
        f"  maxiter 150\n{calc.energy_options}}}\n\n"
        "energy('ccsd(t)')\n"
    )


def last_geometry(text: str) -> list[Atom]:
    """Return the last geometry (angstrom) an NWChem output prints."""
    start = text.rfind("Output coordinates in angstroms")
    if start < 0:
        msg = "no geometry in the NWChem output"
        raise CalculationError(msg)
    atoms: list[Atom] = []
    for line in text[start:].splitlines()[4:]:
        fields = line.split()
        if len(fields) != 6:
            break
        x, y, z = (float(value) for value in fields[3:])
        atoms.append((fields[1], x, y, z))
    return atoms


def last_modes(text: str) -> tuple[list[float], list[list[float]]]:
    """Return the last projected frequencies and their Cartesian vectors."""
    start = text.rfind("(Projected Frequencies expressed in cm-1)")
    if start < 0:
        msg = "no frequencies in the NWChem output"
        raise CalculationError(msg)
    frequencies: list[float] = []
    vectors: list[list[float]] = []
    for line in text[start:].splitlines():
        fields = line.split()
        if fields and fields[0] == "P.Frequency":
            frequencies += [float(value) for value in fields[1:]]
            vectors += [[] for _ in fields[1:]]
        elif frequencies and re.fullmatch(r"\s+\d+(\s+-?\d+\.\d+)+", line):
            width = len(fields) - 1
            for column, value in enumerate(fields[1:]):
                vectors[len(frequencies) - width + column].append(float(value))
        elif frequencies and "----" in line:
            break
    return frequencies, vectors


def describe_mode(atoms: Sequence[Atom], vector: Sequence[float]) -> str:
    """Name the distances the mode shortens and lengthens most."""
    changes: list[tuple[float, float, str]] = []
    for i, first in enumerate(atoms):
        for j in range(i):
            second = atoms[j]
            gap = [a - b for a, b in zip(first[1:], second[1:], strict=True)]
            distance = math.hypot(*gap)
            if distance > 2.0:
                continue
            move = [vector[3 * i + k] - vector[3 * j + k] for k in range(3)]
            rate = sum(g * m for g, m in zip(gap, move, strict=True)) / distance
            label = f"{second[0]}{j + 1}-{first[0]}{i + 1} ({distance:.3f} A)"
            changes.append((rate, distance, label))
    if not changes:
        return "no distances"
    low, high = min(changes), max(changes)
    return f"{low[2]} {low[0]:+.2f}, {high[2]} {high[0]:+.2f}"


def check(calc: Calculation, text: str) -> str:
    """Return one line on the imaginary modes; raise if their number is wrong."""
    frequencies, vectors = last_modes(text)
    imaginary = [k for k, value in enumerate(frequencies) if value < IMAGINARY_BELOW]
    atoms = last_geometry(text)
    words = [f"{frequencies[k]:.0f} cm-1: {describe_mode(atoms, vectors[k])}" for k in imaginary]
    line = f"{calc.name}: {len(imaginary)} imaginary; " + "; ".join(words)
    if len(imaginary) != calc.imaginary_modes:
        msg = f"{line} (expected {calc.imaginary_modes})"
        raise CalculationError(msg)
    return line


def run(command: Sequence[str], folder: Path, output: Path, timeout: float) -> None:
    """Run a program on one core in a folder of its own."""
    environment = dict(os.environ, OMP_NUM_THREADS="1", MKL_NUM_THREADS="1")
    with output.open("w", encoding="utf-8") as stream:
        process = subprocess.run(
            command,
            cwd=folder,
            stdout=stream,
            stderr=subprocess.STDOUT,
            env=environment,
            timeout=timeout,
            start_new_session=True,
            check=False,
        )
    if process.returncode:
        msg = f"{command[0]} ended with status {process.returncode}, see {output}"
        raise CalculationError(msg)


def store(source: Path, target: Path) -> None:
    """Compress a finished output; the target never exists half written."""
    target.parent.mkdir(parents=True, exist_ok=True)
    temporary = target.with_name(f".{target.name}.part")
    with temporary.open("wb") as stream:
        subprocess.run(["gzip", "-9", "-n", "-c", str(source)], stdout=stream, check=True)
    temporary.replace(target)


def read_output(path: Path) -> str:
    """Return the text of a compressed output."""
    with gzip.open(path, "rt", encoding="utf-8", errors="replace") as stream:
        return stream.read()


class Runner:
    """Makes calculations with a limited number of programs at a time."""

    def __init__(self, level: Level, options: argparse.Namespace):
        self.level = level
        self.output: Path = options.output.resolve()
        self.scratch: Path = options.scratch.resolve()
        self.inputs: Path = (options.inputs or options.output / "inputs").resolve()
        self.timeout: float = options.timeout
        self.steps: str = options.steps
        self.lock = threading.Lock()

    def say(self, text: str) -> None:
        """Print one line at once."""
        with self.lock:
            print(text, flush=True)

    def target(self, calc: Calculation, suffix: str = "") -> Path:
        """Return the place of a compressed output."""
        return self.output / calc.folder / f"{calc.name}{suffix}.out.gz"

    def make(self, calc: Calculation) -> bool:
        """Make both outputs of one entry; return whether all went well."""
        try:
            if calc.truncated_from:
                self.truncate(calc)
                return True
            if calc.dft and self.steps != "energy":
                self.make_dft(calc)
            if calc.energy and self.steps != "dft":
                self.make_energy(calc)
        except (CalculationError, subprocess.SubprocessError, OSError) as error:
            self.say(f"FAILED {calc.name}: {error}")
            return False
        return True

    def make_dft(self, calc: Calculation) -> None:
        """Run NWChem, unless its output is there."""
        target = self.target(calc)
        if target.exists():
            return
        folder = self.scratch / calc.name
        shutil.rmtree(folder, ignore_errors=True)
        folder.mkdir(parents=True)
        if calc.kind == "saddle" and "hessian" not in calc.tasks:
            text = guess_input(self.level, calc)
            self.keep_input(calc, f"{calc.name}_guess.nw", text)
            (folder / f"{calc.name}_guess.nw").write_text(text, encoding="utf-8")
            run(["nwchem", f"{calc.name}_guess.nw"], folder, folder / "guess.log", self.timeout)
            for left in folder.glob(f"{calc.name}.*"):
                if left.suffix != ".hess":
                    left.unlink()
        text = nwchem_input(self.level, calc)
        self.keep_input(calc, f"{calc.name}.nw", text)
        (folder / f"{calc.name}.nw").write_text(text, encoding="utf-8")
        output = folder / f"{calc.name}.out"
        stops_early = calc.max_steps < 10
        try:
            run(["nwchem", f"{calc.name}.nw"], folder, output, self.timeout)
        except CalculationError:
            if not stops_early:
                raise
        if not stops_early:
            self.say(check(calc, output.read_text(encoding="utf-8", errors="replace")))
        store(output, target)

    def make_energy(self, calc: Calculation) -> None:
        """Run Psi4 at the geometry of the NWChem output, unless it is there."""
        target = self.target(calc, "_ccsdt")
        if target.exists():
            return
        if calc.dft and not self.target(calc).exists():
            msg = "no geometry yet"
            raise CalculationError(msg)
        if calc.dft:
            atoms = last_geometry(read_output(self.target(calc)))
        else:
            symbol = calc.geometry.split()[0]
            atoms = [(symbol, 0.0, 0.0, 0.0)]
        stem = f"{calc.name}_ccsdt"
        folder = self.scratch / stem
        shutil.rmtree(folder, ignore_errors=True)
        (folder / "scratch").mkdir(parents=True)
        text = psi4_input(self.level, calc, atoms)
        self.keep_input(calc, f"{stem}.dat", text)
        (folder / f"{stem}.dat").write_text(text, encoding="utf-8")
        output = folder / f"{stem}.out"
        command = ["psi4", "-n", "1", "-i", f"{stem}.dat", "-o", f"{stem}.out"]
        command += ["-s", str(folder / "scratch")]
        run(command, folder, folder / "log", self.timeout)
        shutil.rmtree(folder / "scratch", ignore_errors=True)
        found = re.findall(r"\* CCSD\(T\) total energy\s*=\s*(\S+)", output.read_text("utf-8"))
        self.say(f"{stem}: {found[-1] if found else 'no CCSD(T) energy'}")
        store(output, target)

    def keep_input(self, calc: Calculation, name: str, text: str) -> None:
        """Keep the input as it was run."""
        folder = self.inputs / calc.folder
        folder.mkdir(parents=True, exist_ok=True)
        (folder / name).write_text(text, encoding="utf-8")

    def truncate(self, calc: Calculation) -> None:
        """Cut a good output in the middle of its last frequency section."""
        target = self.target(calc)
        if target.exists():
            return
        text = read_output(self.output / f"{calc.truncated_from}.out.gz")
        start = text.rfind("(Projected Frequencies expressed in cm-1)")
        end = text.find("Projected Infra Red Intensities", start)
        self.scratch.mkdir(parents=True, exist_ok=True)
        source = self.scratch / f"{calc.name}.out"
        source.write_text(text[: (start + end) // 2], encoding="utf-8")
        store(source, target)
        self.say(f"{calc.name}: cut from {calc.truncated_from}")


def parse_arguments(arguments: Sequence[str] | None) -> argparse.Namespace:
    """Read the command line."""
    parser = argparse.ArgumentParser(description=__doc__.split("\n", 1)[0] if __doc__ else "")
    parser.add_argument("--table", type=Path, default=HERE / "calculations.yaml")
    temporary = Path(tempfile.gettempdir()) / "cofiring"
    parser.add_argument("--output", type=Path, default=temporary / "outputs")
    parser.add_argument("--scratch", type=Path, default=temporary / "run")
    parser.add_argument("--inputs", type=Path, help="keep the inputs here (default OUTPUT/inputs)")
    parser.add_argument("--only", nargs="+", metavar="NAME", help="make only these entries")
    parser.add_argument("--jobs", type=int, default=2, help="calculations at a time")
    parser.add_argument("--steps", choices=("all", "dft", "energy"), default="all")
    parser.add_argument("--timeout", type=float, default=7200.0, help="seconds for one program")
    parser.add_argument("--check", action="store_true", help="only check the outputs there are")
    return parser.parse_args(arguments)


def check_all(runner: Runner, calculations: Iterable[Calculation]) -> bool:
    """Check every finished NWChem output of the table."""
    good = True
    for calc in calculations:
        path = runner.target(calc)
        if calc.truncated_from or calc.max_steps < 10 or not path.exists():
            continue
        try:
            runner.say(check(calc, read_output(path)))
        except CalculationError as error:
            runner.say(f"WRONG {error}")
            good = False
    return good


def main(arguments: Sequence[str] | None = None) -> int:
    """Make or check the calculations asked for."""
    options = parse_arguments(arguments)
    level, calculations = read_table(options.table)
    if options.only:
        unknown = set(options.only) - {calc.name for calc in calculations}
        if unknown:
            print(f"not in the table: {', '.join(sorted(unknown))}", file=sys.stderr)
            return 2
        calculations = [calc for calc in calculations if calc.name in options.only]
    runner = Runner(level, options)
    if options.check:
        return 0 if check_all(runner, calculations) else 1
    first = [calc for calc in calculations if not calc.truncated_from]
    last = [calc for calc in calculations if calc.truncated_from]
    with ThreadPoolExecutor(max_workers=options.jobs) as pool:
        results = list(pool.map(runner.make, first))
    results += [runner.make(calc) for calc in last]
    return 0 if all(results) else 1


if __name__ == "__main__":
    raise SystemExit(main())
