"""Holds trees against the schema and turns pydantic's faults into problems with file, line and advice."""

from collections.abc import Mapping
from functools import cache
from typing import Any, TypeVar

from pydantic import ValidationError
from pydantic_core import ErrorDetails

from rateloom.job.problems import Fault, Problems, suggestion
from rateloom.job.schema import BLOCKS, Entry
from rateloom.job.tree import Block, Items, Tree, line_of

EntryType = TypeVar("EntryType", bound=Entry)
_PLAIN = {
    "model_type": "a block of 'key: value' lines is wanted here",
    "dict_type": "a block of 'key: value' lines is wanted here",
    "list_type": "a list is wanted here",
    "too_short": "the list is empty",
    "string_type": "a text is wanted here",
}


class Source:
    """A block of a file, with what is needed to say where a fault of it stands."""

    __slots__ = ("file", "line", "path", "tree")

    def __init__(self, file: str, path: tuple[str, ...], line: int, tree: Tree) -> None:
        self.file, self.path, self.line, self.tree = file, path, line, tree

    def tell(self, problems: Problems, inner: tuple[str | int, ...], message: str, advice: str = "") -> None:
        """Note a fault at a key path below this block."""
        key = ".".join(map(str, (*self.path, *inner)))
        problems.add(self.file, self.line_of(inner), key, message, advice)

    def part(self, key: str) -> "Source | None":
        """Give the block under a key, None where the key is absent or empty."""
        if not isinstance(self.tree, Block) or self.tree.get(key) is None:
            return None
        return Source(self.file, (*self.path, key), self.tree.lines[key], self.tree[key])

    def without(self, *keys: str) -> "Source":
        """Give the same block with some keys left out."""
        if not isinstance(self.tree, Block):
            return self
        rest = Block()
        rest.lines = self.tree.lines
        rest.update((key, value) for key, value in self.tree.items() if key not in keys)
        return Source(self.file, self.path, self.line, rest)

    def texts(self, key: str) -> list[tuple[tuple[str | int, ...], str]]:
        """Give the text or texts under a key, each with its key path, whatever else is wrong in this block."""
        value = self.tree.get(key) if isinstance(self.tree, Block) else None
        if isinstance(value, Items):
            return [((key, index), text) for index, text in enumerate(value) if isinstance(text, str)]
        if isinstance(value, Block):
            return [((key, name), name) for name in value]
        return [((key,), value)] if isinstance(value, str) else []

    def line_of(self, inner: tuple[str | int, ...]) -> int:
        """Tell the line of something in this block."""
        return line_of(self.tree, inner, self.line)

    def validate(self, model: type[EntryType], problems: Problems) -> EntryType | None:
        """Make an entry of the block; faults go to ``problems``."""
        if not isinstance(self.tree, Block):
            found = {str: f"the text {str(self.tree)[:40]!r}", list: "a list"}
            name = next((text for kind, text in found.items() if isinstance(self.tree, kind)), "nothing")
            advice = _list(_keys(model))
            self.tell(problems, (), f"{_PLAIN['model_type']}, not {name}", advice)
            return None
        self._drop_empty(model, self.tree, (), problems)
        try:
            return model.model_validate(self.tree)
        except ValidationError as error:
            for details in error.errors(include_url=False, include_input=False):
                self._explain(model, details, problems)
            return None

    def _drop_empty(self, model: type[Entry], tree: Block, inner: tuple[str, ...], problems: Problems) -> None:
        """Tell known keys without a value and leave them out, so that an empty key never counts as a choice."""
        known = _keys(model)
        for key, value in list(tree.items()):
            if value is None and key in known:
                self.tell(problems, (*inner, key), "there is no value", "Write one or remove the key.")
                del tree[key]
            elif isinstance(value, Block) and key in known and key in BLOCKS:
                self._drop_empty(BLOCKS[key], value, (*inner, key), problems)

    def _explain(self, model: type[Entry], details: ErrorDetails, problems: Problems) -> None:
        steps = tuple(step for step in details["loc"] if not (isinstance(step, str) and step[:1] in "<["))
        inside = BLOCKS.get(str(steps[-2]), model) if len(steps) > 1 else model
        last = str(steps[-1]) if steps else ""
        context: Mapping[str, Any] = details.get("ctx", {})
        match details["type"]:
            case "value_error":
                fault: Fault = context["error"]
                self.tell(problems, (*steps, *fault.inner), fault.message, fault.advice)
            case "extra_forbidden":
                known = _keys(inside)
                self.tell(problems, steps, f"unknown key {last!r}", suggestion(last, known) or _list(known))
            case "missing":
                if not self._has_line(steps):  # else it stands there without a value, which is told already
                    self.tell(problems, steps[:-1], f"the key {last!r} is missing", f"Add '{last}: ...' here.")
            case kind if kind in _PLAIN:
                self.tell(problems, steps, _PLAIN[kind], _list(_keys(BLOCKS[last])) if last in BLOCKS else "")
            case _:
                self.tell(problems, steps, details["msg"])

    def _has_line(self, steps: tuple[str | int, ...]) -> bool:
        block: Any = self.tree
        for step in steps[:-1]:
            block = block[step]
        return isinstance(block, Block) and steps[-1] in block.lines


@cache
def _keys(model: type[Entry]) -> list[str]:
    return [field.alias or name for name, field in model.model_fields.items()]


def _list(known: list[str]) -> str:
    return f"Known keys: {', '.join(known)}."
