"""What is out of date, why, and in which order to compute it: decided on digests alone, without files or workers.

A node is looked at when the digests of all its inputs are known. Its key is then looked up among the known results:
found, its digest is at once handed on; not found, it waits for a worker. Equal results therefore stop the wave.
Ready nodes come out longest way first: the way to the end of the graph, weighted with the size of the files to read.
Of nodes with equal keys one is computed and the others share its result.
"""

import heapq
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from enum import Enum
from typing import TYPE_CHECKING

from rateloom.engine.codec import digest_of
from rateloom.engine.files import UNREADABLE
from rateloom.engine.stage import Node, Stage, key_of

if TYPE_CHECKING:
    import networkx as nx

STAGE_WEIGHT = 1_000.0
"""What a stage that reads no file weighs against the size of a file [bytes]."""


class Status(Enum):
    """How a node came by its result."""

    WAITING = "waiting"
    REUSED = "reused"
    COMPUTED = "computed"
    FAULTY = "faulty"


@dataclass(frozen=True, slots=True)
class Past:
    """What the last result of a node was made of."""

    key: bytes
    version: int
    parameters: bytes
    """Hash of the parameters."""
    inputs: tuple[bytes, ...]
    """Digests of the input values, or of the file."""
    faulty: bool = False
    """Whether the stage raised."""


@dataclass(frozen=True, slots=True)
class Reason:
    """Why a node is out of date."""

    node: str
    why: str
    """``new``, ``settings changed``, ``method changed``, ``file changed``, ``file not read before``,
    ``input changed``, ``inputs added or removed``, ``failed before`` or ``result lost``."""
    sources: tuple[str, ...] = ()
    """The inputs that changed, where that is the reason."""


class Schedule:
    """State of one evaluation.

    Parameters
    ----------
    graph
        As ``build_graph`` makes it.
    stages
        By name.
    known
        Gives the digest of a stored result, None where there is none.
    past
        What the last results were made of, by node.
    file_digest, file_size
        Asked once a file node is looked at.
    """

    def __init__(
        self,
        graph: "nx.DiGraph[str]",
        stages: Mapping[str, Stage],
        *,
        known: Callable[[bytes], bytes | None],
        past: Mapping[str, Past],
        file_digest: Callable[[str], bytes],
        file_size: Callable[[str], int],
    ) -> None:
        self._nodes: dict[str, Node] = dict(graph.nodes(data="node"))
        self._successors = {name: tuple(after) for name, after in graph.adjacency()}
        self._missing = {name: len(set(node.inputs)) for name, node in self._nodes.items()}
        self._stages = stages
        self._known = known
        self._past = past
        self._file_digest = file_digest
        self._file_size = file_size
        self._order: list[str] = graph.graph["order"]
        self._urgency: dict[str, float] = {}
        self._ready: list[tuple[float, str]] = []
        self._sharing: dict[bytes, list[str]] = {}
        """By key of a node that was taken: the others with that key."""
        self.digests: dict[str, bytes] = {}
        self.keys: dict[str, bytes] = {}
        self.status = dict.fromkeys(self._nodes, Status.WAITING)
        self.reasons: dict[str, Reason] = {}
        self._look(name for name, count in self._missing.items() if count == 0)

    def _wait(self, node: Node) -> None:
        """Let a node wait for a worker."""
        if not self._urgency:
            self._weigh()
        self.reasons[node.name] = self._reason(node)
        heapq.heappush(self._ready, (-self._urgency[node.name], node.name))

    def _weigh(self) -> None:
        """Find the weight of the longest way from each node to the end; needed only if there is work to do."""
        for name in reversed(self._order):
            file = self._nodes[name].file
            own = STAGE_WEIGHT if file is None else float(self._file_size(file))
            self._urgency[name] = own + max((self._urgency[after] for after in self._successors[name]), default=0.0)

    def _look(self, names: Iterable[str]) -> None:
        """Look at nodes whose inputs are known, and on from those that need no work."""
        pending = list(names)
        while pending:
            name = pending.pop()
            node = self._nodes[name]
            self.keys[name] = self._key(node)
            digest = self._known(self.keys[name])
            if digest is None:
                self._wait(node)
            else:
                self.status[name] = Status.REUSED
                pending += self._hand_on(name, digest)

    def _ingredients(self, node: Node) -> tuple[bytes, ...]:
        if node.file is not None:
            return (self._file_digest(node.file),)
        return tuple(self.digests[source] for source in node.inputs)

    def _key(self, node: Node) -> bytes:
        return key_of(node, self._stages[node.stage].version, self._ingredients(node))

    def _hand_on(self, name: str, digest: bytes) -> list[str]:
        """Note the digest of a result; give the nodes that can now be looked at."""
        self.digests[name] = digest
        free = []
        for after in self._successors[name]:
            self._missing[after] -= 1
            if self._missing[after] == 0:
                free.append(after)
        return free

    def past_of(self, name: str) -> Past:
        """Say what the result of a node is made of, for the next run to compare with."""
        node = self._nodes[name]
        version = self._stages[node.stage].version
        faulty = self.status[name] is Status.FAULTY
        return Past(self.keys[name], version, digest_of(node.parameters), self._ingredients(node), faulty)

    def _reason(self, node: Node) -> Reason:
        past = self._past.get(node.name)
        if past is None:
            return Reason(node.name, "new")
        if past.version != self._stages[node.stage].version:
            return Reason(node.name, "method changed")
        if past.parameters != digest_of(node.parameters):
            return Reason(node.name, "settings changed")
        now = self._ingredients(node)
        if now == past.inputs:
            return Reason(node.name, "failed before" if past.faulty else "result lost")
        if node.file is not None:
            unread = past.inputs[0].startswith(UNREADABLE)
            return Reason(node.name, "file not read before" if unread else "file changed")
        if len(now) != len(past.inputs):
            return Reason(node.name, "inputs added or removed")
        changed = {s for s, new, old in zip(node.inputs, now, past.inputs, strict=True) if new != old}
        return Reason(node.name, "input changed", tuple(sorted(changed)))

    @property
    def ready(self) -> int:
        """How many nodes wait for a worker."""
        return len(self._ready)

    def take(self) -> Node | None:
        """Give the most urgent node that waits for a worker, None where none is ready."""
        while self._ready:
            name = heapq.heappop(self._ready)[1]
            key = self.keys[name]
            digest = self._known(key)
            if digest is not None:
                self.status[name] = Status.REUSED
                self._look(self._hand_on(name, digest))
            elif key in self._sharing:
                self._sharing[key].append(name)
            else:
                self._sharing[key] = []
                return self._nodes[name]
        return None

    def give_back(self, name: str) -> None:
        """Look again at a node that was taken and whose file has changed since."""
        self._look([*self._sharing.pop(self.keys[name]), name])

    def finish(self, name: str, digest: bytes, *, faulty: bool = False) -> list[str]:
        """Note the result of a node that was taken; give the other nodes that share it."""
        self.status[name] = Status.FAULTY if faulty else Status.COMPUTED
        sharing = self._sharing.pop(self.keys[name])
        for other in sharing:
            self.status[other] = Status.FAULTY if faulty else Status.REUSED
        for each in (name, *sharing):
            self._look(self._hand_on(each, digest))
        return sharing

    @property
    def waiting(self) -> list[str]:
        """Nodes without a result so far, in order of name."""
        return sorted(name for name, status in self.status.items() if status is Status.WAITING)
