"""Outputs damaged in every way: a sound record or one kind of error, in bounded time; nothing cut is finished.

Damage is drawn from a seed, so that every case can be repeated alone.
"""

import gzip
import lzma
import random
import re
import signal
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from functools import cache
from pathlib import Path

import numpy as np
import pytest

from rateloom.calculation import Calculation, read_calculation
from rateloom.calculation.output import open_output
from rateloom.calculation.programs import recognise
from rateloom.calculation.programs.search import matches
from rateloom.errors import CalculationError, TooLargeError

OWN = Path(__file__).parent / "outputs"
MANY = Path(__file__).resolve().parents[3] / "shared" / "outputs"
SMALL = 30_000
"""Compressed size up to which an output is damaged here [bytes]: thousands of cases in minutes."""
SECONDS = 30.0
"""Of processor time, hundreds of times what a file of this size takes."""
LARGEST = 20_000_000
CHUNK = 50
NONSENSE = (
    "nan", "inf", "-inf", "1e999", "-1.0E+400", "1.0D+300", "********", "-", "", "99999999999999999999999", "0x1F",
    "１２.５", "--5.0", "1.2.3", "-0.0", "5,0", "\x00", "1.0E", "7e7.7",
)  # fmt: skip


class Hang(BaseException):
    """Not an Exception, so that nothing on the way takes it for damage of the file."""


@contextmanager
def at_most(seconds: float) -> Iterator[None]:
    def stop(*_: object) -> None:
        raise Hang

    former = signal.signal(signal.SIGVTALRM, stop)
    signal.setitimer(signal.ITIMER_VIRTUAL, seconds)
    try:
        yield
    finally:
        signal.setitimer(signal.ITIMER_VIRTUAL, 0)
        signal.signal(signal.SIGVTALRM, former)


@cache
def files(*, own_only: bool) -> tuple[Path, ...]:
    found = list(OWN.glob("*/*.gz")) + ([] if own_only else list(MANY.glob("*/*.gz")))
    return tuple(sorted(path for path in found if path.stat().st_size <= SMALL))


@cache
def text_of_file(path: Path) -> str:
    return open_output(path.name, path.read_bytes()).text


def cut(text: str, _other: str, draw: random.Random) -> str:
    return text[: draw.randrange(len(text))]


def splice(text: str, other: str, draw: random.Random) -> str:
    lines, more = text.split("\n"), other.split("\n")
    return "\n".join(lines[: draw.randrange(len(lines))] + more[draw.randrange(len(more)) :])


def nonsense(text: str, _other: str, draw: random.Random) -> str:
    share = draw.choice((0.001, 0.01, 0.3))
    return re.sub(
        r"-?\d*\.?\d+(?:[EeDd][-+]\d+)?",
        lambda m: draw.choice(NONSENSE) if draw.random() < share else m.group(),
        text,
    )


def huge(text: str, _other: str, draw: random.Random) -> str:
    share = draw.choice((0.01, 0.3))
    return re.sub(r"\d+\.\d+", lambda m: f"{10 ** draw.randrange(9)}{m[0]}" if draw.random() < share else m[0], text)


def negative(text: str, _other: str, draw: random.Random) -> str:
    return re.sub(r"(?<= )\d+(\.\d+)?", lambda m: "-" + m.group() if draw.random() < 0.05 else m.group(), text)


def part(lines: list[str], draw: random.Random) -> tuple[int, int]:
    begin = draw.randrange(len(lines))
    return begin, begin + draw.choice((1, 3, 30, 300))


def repeat(text: str, _other: str, draw: random.Random) -> str:
    lines = text.split("\n")
    begin, end = part(lines, draw)
    return "\n".join(lines[:begin] + lines[begin:end] * draw.choice((2, 20)) + lines[end:])


def delete(text: str, _other: str, draw: random.Random) -> str:
    lines = text.split("\n")
    begin, end = part(lines, draw)
    return "\n".join(lines[:begin] + lines[end:])


def shuffle(text: str, _other: str, draw: random.Random) -> str:
    lines = text.split("\n")
    begin, end = part(lines, draw)
    return "\n".join(lines[:begin] + draw.sample(lines[begin:end], len(lines[begin:end])) + lines[end:])


def long_line(text: str, _other: str, draw: random.Random) -> str:
    place = draw.randrange(len(text))
    filling = draw.choice(("x", "1.0 ", " ", "= ", "9")) * draw.choice((200_000, 1_200_000))
    return text[:place] + filling + text[place:]


def bytes_between(text: str, _other: str, draw: random.Random) -> bytes:
    data = text.encode()
    place = draw.randrange(len(data))
    return data[:place] + draw.randbytes(draw.choice((3, 500))) + data[place:]


def encoded_otherwise(text: str, _other: str, draw: random.Random) -> bytes:
    return text.replace("e", "é", 3).encode(
        draw.choice(("utf-16", "utf-16-be", "latin-1", "utf-8-sig", "cp500")), "replace"
    )


def packed_badly(text: str, other: str, draw: random.Random) -> bytes:
    packed = draw.choice((gzip.compress, lzma.compress))(text.encode())
    place = draw.randrange(12, len(packed))
    flipped = packed[:place] + bytes([packed[place] ^ 0x55]) + packed[place + 1 :]
    return draw.choice((packed[:place], flipped, packed + packed, packed + other.encode(), gzip.compress(packed)))


def bomb(text: str, _other: str, draw: random.Random) -> bytes:
    return gzip.compress(text.encode()) + gzip.compress(draw.choice((b"\n", b"0 ", b" x\n")) * LARGEST, 1)


DAMAGES: tuple[Callable[[str, str, random.Random], str | bytes], ...] = (
    cut, splice, nonsense, huge, negative, repeat, delete, shuffle, bytes_between, encoded_otherwise, packed_badly,
)  # fmt: skip
COSTLY = (long_line, bomb)
"""Megabytes each: one case in twenty-five."""


def check_case(seed: int, *, own_only: bool) -> None:
    draw = random.Random(f"hostile {seed}")
    path, other = draw.choice(files(own_only=own_only)), draw.choice(files(own_only=own_only))
    damage = draw.choice(COSTLY) if seed % 25 == 0 else draw.choice(DAMAGES)
    text = text_of_file(path)
    damaged = damage(text, text_of_file(other), draw)
    case = f"seed {seed}: {damage.__name__} of {path.name}"
    try:
        with at_most(SECONDS):
            record = read_calculation(
                path.name, damaged if isinstance(damaged, bytes) else damaged.encode(), largest=LARGEST
            )
    except (CalculationError, TooLargeError):
        return
    except BaseException as error:
        error.add_note(case)
        raise
    check_sound(record, case)
    if damage is cut and ends_inside_a_job(text, len(damaged)):
        assert not record.finished, case


def ends_inside_a_job(text: str, place: int) -> bool:
    """Tell whether a cut stands before the end of a job; one between two jobs of a file cannot be seen."""
    program = recognise(text)
    assert program is not None
    ends = [match.end() for match in matches(program.ends, text)]
    if not ends or place >= ends[-1]:
        return False
    last_end = max((end for end in ends if end <= place), default=0)
    if last_end == 0 or not program.begins:
        return True
    return any(last_end <= match.start() < place for match in matches(program.begins, text))


def check_sound(record: Calculation, case: str) -> None:
    atoms = len(record.atoms)
    assert record.geometry_angstrom.shape == (atoms, 3), case
    assert np.abs(record.geometry_angstrom).max(initial=0) <= 1e4, case
    for energy in record.energies_hartree.values():
        assert abs(energy) <= 1e6, case
    if record.frequencies_per_cm is not None:
        assert np.abs(record.frequencies_per_cm).max(initial=0) <= 1e5, case
        assert np.all(np.diff(record.frequencies_per_cm) >= 0), case
    if record.displacements is not None:
        assert record.frequencies_per_cm is not None, case
        assert record.displacements.shape == (len(record.frequencies_per_cm), atoms, 3), case
        assert np.isfinite(record.displacements).all(), case
    if record.masses_u is not None:
        assert record.masses_u.shape == (atoms,), case
        assert np.all((record.masses_u > 0) & (record.masses_u < 1e3)), case
    if record.hessian is not None:
        assert np.isfinite(record.hessian).all(), case
    if record.rotational_constants_per_cm is not None:
        assert np.isfinite(record.rotational_constants_per_cm).all(), case
    for value in (record.spin_squared, record.largest_gradient):
        assert value is None or np.isfinite(value), case


@pytest.mark.parametrize("chunk", range(6))
def test_damaged_output_gives_a_sound_record_or_a_calculation_error(chunk: int) -> None:
    for seed in range(10 * chunk, 10 * chunk + 10):
        check_case(seed, own_only=True)


@pytest.mark.long
@pytest.mark.usefixtures("many_outputs")
@pytest.mark.parametrize("chunk", range(5_000 // CHUNK))
def test_thousands_of_damaged_outputs_of_many_programs(chunk: int) -> None:
    for seed in range(1_000 + CHUNK * chunk, 1_000 + CHUNK * (chunk + 1)):
        check_case(seed, own_only=False)


@pytest.mark.parametrize(
    ("number", "absurd"),
    [
        ("1.0E+999", "an energy of inf hartree"),
        ("-12345678.5", "an energy of -1.23457e+07 hartree"),
    ],
)
def test_absurd_energy_is_no_energy(text_of: Callable[[str], str], number: str, absurd: str) -> None:
    text = text_of("Psi4-1.3.2/oh_uhf_ccsdt.out.gz")
    changed = re.sub(r"(\* CCSD\(T\) total energy +=) +\S+", rf"\1 {number}", text)

    with pytest.raises(CalculationError, match=re.escape(absurd)):
        read_calculation("oh.out", changed.encode())


def test_absurd_frequency_is_no_frequency(text_of: Callable[[str], str]) -> None:
    text = text_of("NWChem7.0.2/h2o_several_tasks.out.gz")
    changed = text.replace("  4097.92", "  9000000000.00")

    with pytest.raises(CalculationError, match=re.escape("a frequency of 9e+09 cm-1")):
        read_calculation("water.out", changed.encode())
