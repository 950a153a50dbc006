"""What the code behind a stage looks like: one hash of all it may run, blind to layout, comments and docstrings.

A stage's code is the module of its function and, from there on, every module of the package that is imported for a
name; a room that only hands a name on is looked through. The engine is left out: it cannot change a result. Files of
data in the folders of those modules count too.
"""

import ast
import functools
import importlib
import json
from collections.abc import Iterator, Mapping
from hashlib import sha256
from pathlib import Path
from typing import Any

ADVICE = (
    "raise its version, or record the sources again with `python tests/batch/record_stage_sources.py` "
    "if the results cannot differ"
)


class Sources:
    """Modules of a package as files.

    Parameters
    ----------
    root
        The folder that holds the package.
    package
        Its name.
    left_out
        Rooms whose code cannot change a result.
    """

    def __init__(self, root: Path, package: str, left_out: tuple[str, ...] = ()) -> None:
        self._root = root
        self._package = package
        self._left_out = left_out
        self._tree = functools.cache(self._parse)

    def hash_of(self, modules: set[str]) -> str:
        """Hash modules and all they import."""
        state = sha256()
        closure = self.closure(modules)
        for module in sorted(closure):
            state.update(f"{module}\n{plain(self._tree(module))}\n".encode())
        for file in sorted({f for module in closure for f in self._file(module).parent.iterdir() if is_data(f)}):
            state.update(file.name.encode() + sha256(file.read_bytes()).digest())
        return state.hexdigest()[:32]

    def closure(self, modules: set[str]) -> set[str]:
        """Modules that may run, starting from some."""
        seen: set[str] = set()
        pending = sorted(modules)
        while pending:
            module = pending.pop()
            if module not in seen and not module.startswith(self._left_out):
                seen.add(module)
                pending += self._imports(module)
        return seen

    def _imports(self, module: str) -> Iterator[str]:
        for node in ast.walk(self._tree(module)):
            if isinstance(node, ast.Import):
                yield from (alias.name for alias in node.names if self._file_or_none(alias.name))
            elif isinstance(node, ast.ImportFrom):
                source = self._absolute(module, node)
                if self._file_or_none(source):
                    for alias in node.names:
                        yield self._home(source, alias.name)

    def _home(self, module: str, name: str) -> str:
        """Module that a name comes from: through the rooms that hand it on."""
        if self._file_or_none(f"{module}.{name}"):
            return f"{module}.{name}"
        if self._file(module).name == "__init__.py":
            for node in self._tree(module).body:
                if isinstance(node, ast.ImportFrom):
                    for alias in node.names:
                        source = self._absolute(module, node)
                        if (alias.asname or alias.name) == name and self._file_or_none(source):
                            return self._home(source, alias.name)
        return module

    def _absolute(self, module: str, node: ast.ImportFrom) -> str:
        if not node.level:
            return node.module or ""
        parts = module.split(".") + (["__init__"] if self._file(module).name == "__init__.py" else [])
        return ".".join([*parts[: -node.level], *filter(None, [node.module])])

    def _parse(self, module: str) -> ast.Module:
        return ast.parse(self._file(module).read_text(encoding="utf-8"))

    def _file_or_none(self, module: str) -> Path | None:
        if module != self._package and not module.startswith(f"{self._package}."):
            return None
        path = self._root.joinpath(*module.split("."))
        choices = (path / "__init__.py", path.with_name(f"{path.name}.py"))
        return next((choice for choice in choices if choice.is_file()), None)

    def _file(self, module: str) -> Path:
        file = self._file_or_none(module)
        if file is None:
            msg = f"{module} is no module of {self._package}"
            raise ModuleNotFoundError(msg)
        return file


def is_data(file: Path) -> bool:
    """Tell a table kept beside the code from code."""
    return file.is_file() and file.suffix in {".csv", ".dat", ".json", ".toml", ".txt", ".yaml", ".yml"}


def plain(node: Any) -> str:
    """Write a syntax tree without places, docstrings and what only newer Pythons write down."""
    if isinstance(node, list):
        return "[" + ",".join(plain(item) for item in node) + "]"
    if not isinstance(node, ast.AST):
        return repr(node)
    fields = []
    for name, value in ast.iter_fields(node):
        if name == "body" and isinstance(value, list) and is_docstring(value):
            value = value[1:]
        if value not in (None, []) and name not in {"ctx", "kind", "type_comment", "type_ignores"}:
            fields.append(f"{name}={plain(value)}")
    return f"{type(node).__name__}({','.join(fields)})"


def is_docstring(body: list[Any]) -> bool:
    """Tell whether a body begins with a text that does nothing."""
    first = body[0] if body else None
    return (
        isinstance(first, ast.Expr) and isinstance(first.value, ast.Constant) and isinstance(first.value.value, str)
    )


def describe(stages: Mapping[str, Any], sources: Sources) -> dict[str, dict[str, Any]]:
    """Give version and hash of the sources of every stage."""
    found = {}
    for name, stage in sorted(stages.items()):
        functions = [unwrapped(f) for f in (stage.compute, stage.unreadable) if f is not None]
        found[name] = {"version": stage.version, "source": sources.hash_of({f.__module__ for f in functions})}
    return found


def unwrapped(function: Any) -> Any:
    """Give the function inside partial ones."""
    while isinstance(function, functools.partial):
        function = function.func
    return function


def differences(recorded: Mapping[str, Mapping[str, Any]], now: Mapping[str, Mapping[str, Any]]) -> list[str]:
    """Say what is wrong with the record, one sentence a stage."""
    faults = []
    for name in sorted(recorded.keys() | now.keys()):
        old, new = recorded.get(name), now.get(name)
        if old is None or new is None:
            faults.append(f"stage {name} is {'new' if old is None else 'gone'}: record the sources again")
        elif new["version"] < old["version"]:
            faults.append(f"stage {name} went back from version {old['version']}: results of both would be mixed up")
        elif new["version"] > old["version"]:
            faults.append(f"stage {name} has a new version: record the sources again")
        elif new["source"] != old["source"]:
            faults.append(f"stage {name} changed: {ADVICE}")
    return faults


def table(name: str) -> Mapping[str, Any]:
    """Import a table named ``module:name``."""
    module, attribute = name.split(":")
    return getattr(importlib.import_module(module), attribute)


def load(file: Path) -> dict[str, dict[str, Any]]:
    """Read a record; empty where none was made yet."""
    return json.loads(file.read_text(encoding="utf-8")) if file.exists() else {}


def save(file: Path, description: Mapping[str, Mapping[str, Any]]) -> None:
    """Write a record."""
    file.write_text(json.dumps(description, indent=1, sort_keys=True) + "\n", encoding="utf-8")
