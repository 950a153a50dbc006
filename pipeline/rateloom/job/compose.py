"""YAML text to a tree of literal texts that knows its lines.

YAML 1.1 would take the species ``NO`` for a falsehood, ``1e-5`` for a word and ``12:30`` for 750. Here nothing is
guessed: every scalar is the text that stands in the file, and each field of the job file says what it wants.
Events are read one by one, so that neither deep nesting nor exploding aliases cost memory.
"""

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any, NoReturn

import yaml

from rateloom.job.problems import FileFault, Problems, refuse_file, suggestion
from rateloom.job.tree import Block, Items, Tree

MAX_DEPTH = 30
"""Nesting of blocks and lists; a job file needs 6."""
MAX_REPEATED = 1_000_000
"""Entries that come from aliases, all expanded."""
_LOADER = getattr(yaml, "CSafeLoader", yaml.SafeLoader)
_NULLS = frozenset(("", "~", "null", "Null", "NULL"))
_SHAPE = "Begin with a line such as 'species:'."
_CORE = "tag:yaml.org,2002:"
_TAGS = frozenset(_CORE + kind for kind in ("str", "int", "float", "bool", "null", "map", "seq"))


@dataclass(slots=True)
class _Frame:
    """A block or list that is still open."""

    node: Block | Items
    line: int
    anchor: str | None
    key: str | None = None
    key_line: int = 0
    merged: list[Block] = field(default_factory=list)


def compose(text: str, file: str, problems: Problems) -> Block | None:
    """Read one YAML document; faults go to ``problems``, None comes back where nothing can be used."""
    builder = _Builder(file, problems)
    try:
        for event in yaml.parse(text, Loader=_LOADER):
            builder.take(event)
        root = builder.root
        if root is None:
            refuse_file(0, "the file is empty", "Write at least temperatures and species into it.")
        if not isinstance(root, Block):
            refuse_file(builder.root_line, "a job file is a block of 'key: value' lines", _SHAPE)
    except FileFault as fault:
        problems.add(file, fault.line, builder.path(), fault.message, fault.advice)
    except yaml.MarkedYAMLError as error:
        problems.add(file, *_syntax(error, text))
    except yaml.YAMLError as error:
        problems.add(file, 0, "", f"not readable as YAML: {' '.join(str(error).split())}")
    else:
        return root
    problems.incomplete = True
    return None


class _Builder:
    """Puts events together."""

    def __init__(self, file: str, problems: Problems) -> None:
        self._file = file
        self._problems = problems
        self._frames: list[_Frame] = []
        self._anchors: dict[str, Tree] = {}
        self._repeated = 0
        self._documents = 0
        self._handlers: dict[type, Callable[[Any], None]] = {
            yaml.ScalarEvent: self._scalar,
            yaml.MappingStartEvent: self._open,
            yaml.SequenceStartEvent: self._open,
            yaml.MappingEndEvent: self._close,
            yaml.SequenceEndEvent: self._close,
            yaml.AliasEvent: self._alias,
            yaml.DocumentStartEvent: self._document,
        }
        self.root: Tree = None
        self.root_line = 0

    def path(self) -> str:
        """Key path of what is being read."""
        steps = (str(len(f.node)) if isinstance(f.node, Items) else f.key for f in self._frames)
        return ".".join(step for step in steps if step is not None)

    def take(self, event: yaml.Event) -> None:
        """Add one event of the parser."""
        handler = self._handlers.get(type(event))
        if handler is not None:
            handler(event)

    def _document(self, event: yaml.Event) -> None:
        self._documents += 1
        if self._documents > 1:
            line = _line(event)
            refuse_file(line, "a second document begins here", "Remove the line '---', or use include.")

    def _scalar(self, event: yaml.ScalarEvent) -> None:
        line = _line(event)
        if event.tag is not None:
            self._check_tag(event.tag, line)
        plain = (event.implicit[0] and event.style is None) or event.style == ""
        value = None if plain and event.value in _NULLS else event.value
        if event.anchor:
            self._anchors[event.anchor] = value
        frame = self._frames[-1] if self._frames else None
        if frame is not None and frame.key is None and isinstance(frame.node, Block):
            self._begin_key(frame, event.value, line)
        else:
            self._put(value, line, 1)

    def _begin_key(self, frame: _Frame, key: str, line: int) -> None:
        frame.key, frame.key_line = key, line
        if key in frame.node and isinstance(frame.node, Block):
            first = frame.node.lines[key]
            advice = f"It stands on line {first} already. Rename or remove one of them."
            self._problems.add(self._file, line, self.path(), f"the key {key!r} stands twice in one block", advice)

    def _open(self, event: yaml.CollectionStartEvent) -> None:
        line = _line(event)
        self._check_tag(event.tag, line)
        if self._frames and self._frames[-1].key is None and isinstance(self._frames[-1].node, Block):
            self._refuse_key(line)
        if len(self._frames) >= MAX_DEPTH:
            refuse_file(line, f"blocks and lists are nested more than {MAX_DEPTH} deep", "Flatten the file.")
        node = Block() if isinstance(event, yaml.MappingStartEvent) else Items()
        if event.anchor:
            self._anchors.pop(event.anchor, None)  # unknown until it is closed: no alias inside itself
        self._frames.append(_Frame(node, line, event.anchor))

    def _close(self, event: yaml.Event) -> None:  # noqa: ARG002 - the signature of all handlers
        frame = self._frames.pop()
        if isinstance(frame.node, Block):
            for block in frame.merged:
                for key, value in block.items():
                    if key not in frame.node:
                        frame.node[key], frame.node.lines[key] = value, block.lines[key]
        if frame.anchor:
            self._anchors[frame.anchor] = frame.node
        self._put(frame.node, frame.line, frame.node.size)

    def _alias(self, event: yaml.AliasEvent) -> None:
        line = _line(event)
        name = event.anchor or ""
        if any(frame.anchor == name for frame in self._frames):
            refuse_file(line, f"the alias '*{name}' stands inside what it names", "Write that entry out.")
        if name not in self._anchors:
            advice = suggestion(name, list(self._anchors)) or f"Quote the text if a '*' is meant: '*{name}'."
            refuse_file(line, f"no anchor is called '&{name}'", advice)
        value = self._anchors[name]
        size = value.size if isinstance(value, Block | Items) else 1
        self._repeated += size
        if self._repeated > MAX_REPEATED:
            message = f"aliases expand to more than {MAX_REPEATED} entries"
            refuse_file(line, message, "Write the entries out or split the job.")
        frame = self._frames[-1] if self._frames else None
        if frame is not None and frame.key is None and isinstance(frame.node, Block):
            if not isinstance(value, str):
                self._refuse_key(line)
            self._begin_key(frame, value, line)
        else:
            self._put(value, line, size)

    def _put(self, value: Tree, line: int, size: int) -> None:
        """Give a finished value to the block or list around it."""
        if not self._frames:
            self.root, self.root_line = value, line
            return
        frame = self._frames[-1]
        frame.node.size += size
        if isinstance(frame.node, Items):
            frame.node.append(value)
            frame.node.lines.append(line)
            return
        assert frame.key is not None
        if frame.key == "<<":
            self._merge(frame, value, line)
        elif frame.key not in frame.node:
            frame.node[frame.key] = value
            frame.node.lines[frame.key] = frame.key_line
        frame.key = None

    @staticmethod
    def _merge(frame: _Frame, value: Tree, line: int) -> None:
        blocks = value if isinstance(value, Items) else [value]
        for block in blocks:
            if not isinstance(block, Block):
                refuse_file(line, "'<<' merges blocks alone", "Name an anchor of a block: '<<: *name'.")
            frame.merged.append(block)

    @staticmethod
    def _refuse_key(line: int) -> NoReturn:
        refuse_file(line, "a key must be a word, not a block or a list", "Quote a name that begins with [ or {.")

    @staticmethod
    def _check_tag(tag: str | None, line: int) -> None:
        if tag is not None and tag not in _TAGS and tag != "!":
            shown = tag.removeprefix(_CORE)
            refuse_file(line, f"the YAML tag {shown!r} is not used in job files", "Remove the tag.")


def _line(event: yaml.Event) -> int:
    return event.start_mark.line + 1 if event.start_mark else 0


def _syntax(error: yaml.MarkedYAMLError, text: str) -> tuple[int, str, str, str]:
    """Line, key, message and advice of a fault of syntax."""
    mark = error.problem_mark or error.context_mark
    if mark is None:
        return 0, "", f"not readable as YAML: {error.problem}", ""
    line = mark.line + 1
    lines = text.splitlines()
    before = lines[mark.line][: mark.column + 1] if mark.line < len(lines) else ""
    advice = "Check the indentation, the brackets and the quotes around here."
    if "\t" in before and not before.strip():
        advice = "A tab stands in the indentation: replace it by blanks."
    elif before.lstrip().startswith(("*", "@", "`", "%")) or "alias" in (error.context or ""):
        advice = "Quote a text that begins with a special character."
    context = f", {error.context}" if error.context else ""
    return line, "", f"YAML: {error.problem} (column {mark.column + 1}{context})", advice
