"""The text of a file that may be a job file, or why it is none."""

import re
from pathlib import Path

from rateloom.job.problems import nearest, refuse_file

MAX_BYTES = 50_000_000
"""Size above which a file is not taken for a job file; 5000 reactions need about 2 MB."""
_CONTROL = re.compile("[\x00-\x08\x0b\x0c\x0e-\x1f\x7f-\x84\x86-\x9f\ufffe\uffff]")


def read_text(path: Path) -> str:
    """Read a file as UTF-8 text, with or without a byte order mark.

    Raises
    ------
    FileFault
        It cannot be read, or is no text.
    """
    try:
        if path.is_dir():
            refuse_file(0, "this is a folder, not a job file", "Name a YAML file in it.")
        if path.exists() and not path.is_file():
            refuse_file(0, "this is not an ordinary file", "Name a YAML file.")
        with path.open("rb") as stream:
            data = stream.read(MAX_BYTES + 1)
    except FileNotFoundError:
        refuse_file(0, "there is no such file", _near(path))
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        refuse_file(0, f"the file cannot be read: {reason}", "Check its name and permissions.")
    if len(data) > MAX_BYTES:
        message = f"the file is larger than {MAX_BYTES // 1_000_000} MB"
        refuse_file(0, message, "Split it and use include; is it a job file at all?")
    return _decoded(data)


def _decoded(data: bytes) -> str:
    if data.startswith((b"\xff\xfe", b"\xfe\xff")):
        refuse_file(1, "the file is UTF-16, not UTF-8", "Save it as UTF-8.")
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        message = f"byte {data[error.start]:#04x} is not UTF-8 text"
        refuse_file(line, message, "Save the file as UTF-8; is it a job file at all?")
    if found := _CONTROL.search(text):
        line = text.count("\n", 0, found.start()) + 1
        message = f"the control character U+{ord(found[0]):04X} stands in the text"
        refuse_file(line, message, "Remove it; is this a job file at all?")
    if not text.strip():
        refuse_file(0, "the file is empty", "Write at least temperatures and species into it.")
    return text


def _near(path: Path) -> str:
    """Name the YAML file that may have been meant."""
    try:
        names = sorted(entry.name for entry in path.parent.iterdir() if entry.suffix in (".yaml", ".yml"))
    except OSError:
        return f"There is no folder '{path.parent}' that can be read."
    closest = nearest(path.name, names)
    return f"Closest: {closest!r} in the same folder." if closest else "Check its name."
