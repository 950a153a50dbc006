"""Stages, the nodes that apply them, and the work order that a worker carries out."""

import time
import traceback
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from hashlib import sha256
from pathlib import Path
from typing import TYPE_CHECKING, Any, Optional

from rateloom.engine.codec import decode, digest_of, encode
from rateloom.engine.limits import TimeIsUp, time_limit
from rateloom.errors import TooLargeError
from rateloom.remarks import Remark

if TYPE_CHECKING:
    import networkx as nx


@dataclass(frozen=True, slots=True)
class Outcome:
    """What a stage gives: a value for the stages after it, and remarks for the audit.

    Remarks are kept apart so that a new wording wakes no later stage. The value None says that there is nothing to go
    on with; the remarks say why.
    """

    value: Any
    remarks: tuple[Remark, ...] = ()


@dataclass(frozen=True, slots=True)
class Stage:
    """A named pure function."""

    name: str
    version: int
    """Raised by hand whenever equal inputs may give another result."""
    compute: Callable[..., Outcome]
    """Called with the parameters and the input values in order (None for an input that gave nothing); a stage that
    reads a file is called with the parameters, the name of the file (without its folder, which no key knows of), its
    bytes and, as ``largest``, how many it may unpack them to; more than that raises ``TooLargeError``."""
    parameters: Any
    """Type of the parameters."""
    value: Any
    """Type of the value."""
    unreadable: Callable[[str], Outcome] | None = None
    """For a stage that reads a file: what it gives for a file that cannot be opened, called with the reason."""

    @property
    def reads_file(self) -> bool:
        """Whether the stage takes a file instead of inputs."""
        return self.unreadable is not None


@dataclass(frozen=True, slots=True)
class Node:
    """One application of a stage."""

    name: str
    """Unique, readable: ``species CH4``."""
    stage: str
    parameters: bytes
    """Encoded."""
    inputs: tuple[str, ...] = ()
    """Names of the nodes whose values go in, in order."""
    file: str | None = None
    """Absolute path, for a stage that reads a file."""


def build_graph(nodes: Iterable[Node]) -> "nx.DiGraph[str]":
    """Join nodes into a graph with an edge from each input to the node that takes it.

    The attribute ``order`` of the graph lists the names, inputs first.

    Raises
    ------
    ValueError
        Two nodes have one name, an input is not a node, or the nodes form a circle.
    """
    import networkx as nx  # takes longer to load than a run over unchanged input takes

    graph: nx.DiGraph[str] = nx.DiGraph()
    for node in nodes:
        if node.name in graph:
            msg = f"two nodes are called {node.name!r}"
            raise ValueError(msg)
        graph.add_node(node.name, node=node)
    edges: list[tuple[str, str]] = []
    for name, node in graph.nodes(data="node"):
        for source in node.inputs:
            if source not in graph:
                msg = f"node {name!r} takes {source!r}, which is not a node"
                raise ValueError(msg)
            edges.append((source, name))
    graph.add_edges_from(edges)
    graph.graph["order"] = order = _inputs_first(graph)
    if len(order) < len(graph):
        msg = f"the nodes form a circle: {nx.find_cycle(graph)}"
        raise ValueError(msg)
    return graph


def _inputs_first(graph: "nx.DiGraph[str]") -> list[str]:
    """List the names so that each comes after its inputs; those of a circle are left out."""
    successors = dict(graph.adjacency())
    missing = {name: len(set(node.inputs)) for name, node in graph.nodes(data="node")}
    order = [name for name, count in missing.items() if not count]
    for name in order:
        for after in successors[name]:
            missing[after] -= 1
            if not missing[after]:
                order.append(after)
    return order


def key_of(node: Node, version: int, inputs: Iterable[bytes]) -> bytes:
    """Hash what a result depends on: stage, version, parameters, name of the file, digests of the inputs."""
    file = b"" if node.file is None else Path(node.file).name.encode(errors="surrogateescape")
    return digest_of(node.stage.encode(), str(version).encode(), node.parameters, file, *inputs)


@dataclass(frozen=True, slots=True)
class Task:
    """One node with everything that a worker needs."""

    name: str
    stage: str
    parameters: bytes
    inputs: tuple[tuple[str, bytes], ...] = ()
    """(stage that made it, encoded value), in order."""
    file: str | None = None
    file_digest: bytes = b""
    """SHA-256 that the file must have."""
    file_error: str = ""
    """Why the file cannot be opened at all."""
    file_data: bytes | None = None
    """The file itself, for a worker that cannot see it."""
    seconds: float | None = None
    """How long the reading of the file may take [s]."""
    largest: int | None = None
    """How large the file may be when it is unpacked [bytes]."""


@dataclass(frozen=True, slots=True)
class Done:
    """A finished task."""

    name: str
    value: bytes
    remarks: bytes
    """Encoded; empty where there are none."""
    seconds: float = 0.0
    """How long it took [s]."""


@dataclass(frozen=True, slots=True)
class Undone:
    """A task that gave no result."""

    name: str
    why: str
    """``file-changed``, ``file-not-visible``, ``beyond-limits`` (of time, size or memory) or ``fault`` (the stage
    raised)."""
    detail: str = ""


def run_task(task: Task, stages: Mapping[str, Stage]) -> Done | Undone:
    """Carry out one task; what a stage raises comes back as a value."""
    begun = time.perf_counter()
    try:
        outcome = _outcome(task, stages)
        if isinstance(outcome, Undone):
            return outcome
        remarks = encode(outcome.remarks) if outcome.remarks else b""
        return Done(task.name, encode(outcome.value), remarks, time.perf_counter() - begun)
    except TimeIsUp:
        advice = "Allow more with --seconds-per-file, or take a whole file."
        return Undone(task.name, "beyond-limits", f"Reading took longer than {task.seconds:g} s. {advice}")
    except TooLargeError as error:
        return Undone(task.name, "beyond-limits", error.message)
    except MemoryError:
        advice = "Compute with fewer workers (--workers), or where there is more memory."
        return Undone(task.name, "beyond-limits" if task.file else "fault", f"Out of memory. {advice}")
    except (Exception, SystemExit) as error:  # a library may call sys.exit
        return Undone(task.name, "fault", _describe(error))


def _outcome(task: Task, stages: Mapping[str, Stage]) -> Outcome | Undone:
    """Call the stage of a task with what it takes."""
    stage = stages[task.stage]
    parameters = decode(task.parameters, stage.parameters)
    if stage.unreadable is None:
        values = [decode(data, Optional[stages[name].value]) for name, data in task.inputs]  # noqa: UP045
        return stage.compute(parameters, *values)
    if task.file_error:
        return stage.unreadable(task.file_error)
    data = _file_of(task)
    if isinstance(data, Undone):
        return data
    with time_limit(task.seconds):
        return stage.compute(parameters, Path(task.file or "").name, data, largest=task.largest)


def _file_of(task: Task) -> bytes | Undone:
    """Read the file of a task and make sure that it is the one the key was made of."""
    data = task.file_data
    if data is None:
        try:
            data = Path(task.file or "").read_bytes()
        except OSError as error:
            return Undone(task.name, "file-not-visible", error.strerror or str(error))
    if sha256(data).digest() != task.file_digest:
        return Undone(task.name, "file-changed")
    return data


def _describe(error: BaseException) -> str:
    """Say what was raised and by which line: the last of ours, the last of all where none is ours."""
    frames = traceback.extract_tb(error.__traceback__)
    ours = [frame for frame in frames if "rateloom" in frame.filename and "/engine/" not in frame.filename] or frames
    place = f" at {Path(ours[-1].filename).name}:{ours[-1].lineno}" if ours else ""
    return f"{type(error).__name__}: {error}{place}"
