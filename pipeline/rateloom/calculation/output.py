"""The bytes of one output file as text with line numbers: plain, gzip, bzip2 or xz, told by their first bytes."""

from bisect import bisect_right
from dataclasses import dataclass
from itertools import accumulate
from pathlib import Path

from rateloom.calculation.compression import decompress
from rateloom.errors import CalculationError, TooLargeError

LARGEST = 1_000_000_000
"""Nothing that unpacks to more is read unless asked for [bytes]."""
LONGEST_LINE = 1_000_000
"""No program prints a longer line [bytes]; patterns tried on one take for ever."""
WIDE_TEXT = (b"\xff\xfe", b"\xfe\xff")
CONTROL_CHARACTERS = bytes(ord(" ") if code < ord(" ") and code not in b"\t\n" else code for code in range(256))
"""Other control characters (form feeds of old programs) become spaces."""
SEPARATORS = "\x85\u2028\u2029"
"""What else some count as line ends, and no program does."""
BINARY = 0.01
"""Share of zero bytes above which a file is no text; some programs print a few of them."""


@dataclass(frozen=True, slots=True)
class Output:
    """The text of one output file."""

    name: str
    """File name for messages."""
    text: str
    """Lines end with a line feed alone."""
    starts: tuple[int, ...]
    """Position at which each line begins, ascending."""

    def lines(self) -> list[str]:
        """Give the lines, each with its line feed."""
        return split(self.text)

    def line(self, position: int) -> int:
        """Give the number, counted from 1, of the line that holds a position."""
        return bisect_right(self.starts, position)

    def position(self, line: int) -> int:
        """Give the position at which a line, counted from 1, begins; the end of the text beyond the last one."""
        return self.starts[line - 1] if line <= len(self.starts) else len(self.text)


def load(path: str, largest: int | None = LARGEST) -> bytes:
    """Read the bytes of a file.

    Raises
    ------
    CalculationError
        The file is missing or cannot be read.
    TooLargeError
        It has more than ``largest`` bytes.
    """
    try:
        if largest is not None and Path(path).stat().st_size > largest:
            msg = (
                f"{path}: the file is larger than {largest / 1e6:g} MB. "
                "If it is an output all the same, allow more with --largest-file."
            )
            raise TooLargeError(msg)
        return Path(path).read_bytes()
    except FileNotFoundError as error:
        msg = f"{path}: there is no such file. Check the path, relative to the folder `calculations` of the job file."
        raise CalculationError(msg) from error
    except IsADirectoryError as error:
        msg = f"{path}: this is a folder. Name one output file in it."
        raise CalculationError(msg) from error
    except OSError as error:
        msg = f"{path}: the file cannot be read ({error.strerror})."
        raise CalculationError(msg) from error


def open_output(name: str, data: bytes, largest: int | None = LARGEST) -> Output:
    """Decompress and decode an output file.

    Raises
    ------
    CalculationError
        The file is empty, binary, has a line that no program prints, or its compressed data are broken.
    TooLargeError
        It unpacks to more than ``largest`` bytes.
    """
    data = decompress(name, data, largest)
    text = decode(name, data)
    refuse_endless_line(name, data)
    if not text.strip():
        msg = f"{name}: the file is empty. Run the calculation again or correct the path."
        raise CalculationError(msg)
    lengths = [len(line) for line in split(text)]
    return Output(name, text, (0, *accumulate(lengths[:-1])))


def refuse_endless_line(name: str, data: bytes) -> None:
    """Look for a line too long to be printed by a program, in strides of that length.

    Raises
    ------
    CalculationError
        There is one.
    """
    begin = 0
    while len(data) - begin > LONGEST_LINE:
        end = begin + LONGEST_LINE
        last = max(data.rfind(b"\n", begin, end), data.rfind(b"\r", begin, end))
        if last < 0:
            line = data.count(b"\n", 0, begin) + 1
            msg = (
                f"{name}:{line}: line {line} is longer than {LONGEST_LINE} characters, which no program prints. "
                "The file is damaged or is no text output: take the original."
            )
            raise CalculationError(msg)
        begin = last + 1


def decode(name: str, data: bytes) -> str:
    """Turn bytes into text with line feeds alone; programs print UTF-8 or, in names and units, Latin-1."""
    if data.startswith(WIDE_TEXT):
        data = data.decode("utf-16", errors="replace").encode()
    if data.count(b"\x00") > BINARY * len(data):
        msg = (
            f"{name}: this is a binary file, not the text output of a program. "
            "Name the text output (a checkpoint or wave function file cannot be read)."
        )
        raise CalculationError(msg)
    data = data.replace(b"\r\n", b"\n").replace(b"\r", b"\n").translate(CONTROL_CHARACTERS)
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError:
        text = data.decode("latin-1")
    for separator in SEPARATORS:
        text = text.replace(separator, " ")
    return text


def split(text: str) -> list[str]:
    """Split at line feeds alone, which are kept."""
    lines = text.split("\n")
    last = lines.pop()
    return [line + "\n" for line in lines] + ([last] if last else [])
