"""Regular expressions over a whole output, tried only at lines that hold the words an expression asks for.

Python tries an expression that begins with ``^`` at every character, which takes longer over some files than cclib
does. A plain search for words is a hundred times as fast; where they stand, the expression itself decides.
"""

import re
from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache

TOKEN = re.compile(r"\\.|\[\^?\]?[^\]]*\]|\{[\d,]+\}|.", re.DOTALL)
"""An escape, a set, a count, or one character of an expression."""
LEADING = re.compile(r"\^(?:\\s\*)?")
OVER_LINES = ("\\s", "\\n", "\\W", "\\D", "[^")
"""What may match a line feed, in a set too."""
SHORTEST = 3
"""Shorter words stand in too many lines [characters]."""


@dataclass(frozen=True, slots=True)
class Words:
    """What a text must hold for an expression to match."""

    words: tuple[str, ...]
    """One of them stands in each match; none where that cannot be told."""
    begins_line: bool
    """It stands in the first line of the match (blank ones apart), which begins with that line."""


@lru_cache(maxsize=512)
def pattern(expression: str) -> re.Pattern[str]:
    """Compile an expression of a program's table."""
    return re.compile(expression, re.MULTILINE)


def matches(expression: str, text: str) -> Iterator[re.Match[str]]:
    """Find all matches of an expression, in which ``^`` and ``$`` match at every line.

    The same as ``finditer``, but that a match whose expression begins with ``^\\s*`` holds no blank lines before.
    """
    needed = needed_words(expression)
    if not needed.words:
        yield from pattern(expression).finditer(text)
    elif needed.begins_line:
        compiled, end = pattern(expression), 0
        for start in lines_with(needed.words, text):
            if start >= end and (match := compiled.match(text, start)):
                yield match
                end = match.end()
    elif any(word in text for word in needed.words):
        yield from pattern(expression).finditer(text)


def lines_with(words: tuple[str, ...], text: str) -> list[int]:
    """Give the positions at which the lines that hold one of some words begin, ascending."""
    starts = set()
    for word in words:
        place = text.find(word)
        while place >= 0:
            starts.add(text.rfind("\n", 0, place) + 1)
            line_end = text.find("\n", place)
            place = text.find(word, line_end) if line_end >= 0 else -1
    return sorted(starts)


@lru_cache(maxsize=512)
def needed_words(expression: str) -> Words:
    """Read the words that each alternative of an expression asks for."""
    if expression.startswith("(?"):
        return Words((), False)
    found = [longest(alternative) for alternative in alternatives(expression)]
    if any(len(words) < SHORTEST for words, _ in found):
        return Words((), False)
    return Words(tuple(words for words, _ in found), all(begins for _, begins in found))


def alternatives(expression: str) -> list[list[str]]:
    """Split an expression into tokens, and at the bars outside of groups."""
    parts: list[list[str]] = [[]]
    depth = 0
    for token in TOKEN.findall(expression):
        depth += (token == "(") - (token == ")")
        if token == "|" and depth == 0:
            parts.append([])
        else:
            parts[-1].append(token)
    return parts


def longest(tokens: list[str]) -> tuple[str, bool]:
    """Give the longest words of one alternative, and whether they stand in the first line of its match."""
    leading = LEADING.match("".join(tokens))
    skipped = len(TOKEN.findall(leading.group())) if leading else 0
    first_line = plain_runs(tokens[skipped:], within_line=True)
    if leading and first_line and len(max(first_line, key=len)) >= SHORTEST:
        return max(first_line, key=len), True
    return max(plain_runs(tokens[skipped:], within_line=False), key=len, default=""), False


def plain_runs(tokens: list[str], *, within_line: bool) -> list[str]:
    """Collect the runs of plain characters outside of groups, on wish up to what may match a line feed."""
    runs = [""]
    depth = 0
    for token in tokens:
        depth += (token == "(") - (token == ")")
        if within_line and any(part in token for part in OVER_LINES):
            break
        escaped = token[1] if token.startswith("\\") and not token[1].isalnum() else ""
        if token in ("*", "?") or token.startswith("{"):
            # The character before may be absent.
            runs[-1:] = [runs[-1][:-1], ""]
        elif depth == 0 and (escaped or (len(token) == 1 and token not in "().^$|+")):
            runs[-1] += escaped or token
        else:
            runs.append("")
    return [run for run in runs if run]
