"""The loop that keeps workers busy with what is out of date and every result in the store as soon as it comes."""

import contextlib
from collections import Counter, deque
from collections.abc import Callable, Iterable, Mapping
from concurrent.futures import FIRST_COMPLETED, Future, wait
from dataclasses import dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING

from rateloom.engine.codec import digest_of
from rateloom.engine.files import FileState, Fingerprints
from rateloom.engine.pace import BatchSize, Pace
from rateloom.engine.schedule import Reason, Schedule, Status
from rateloom.engine.stage import Done, Node, Stage, Task, Undone
from rateloom.engine.store import Store
from rateloom.engine.values import NO_VALUE, DamagedResultError, Values
from rateloom.engine.workers import Results, Workers
from rateloom.errors import RateloomError, StoreError

if TYPE_CHECKING:
    import networkx as nx

CHANGES_BORNE = 3
"""How often a file may change under way before it is given up."""
DEATHS_BORNE = 2
MENDS_BORNE = 10
"""How often the store is mended in one run before the disk is held to be at fault."""
CHANGING = "it keeps changing while it is being read"


@dataclass(frozen=True, slots=True)
class Fault:
    """A stage that raised: a defect of the program, not of the input."""

    node: str
    detail: str


@dataclass(slots=True)
class Evaluation:
    """What became of every node."""

    status: dict[str, Status]
    keys: dict[str, bytes]
    digests: dict[str, bytes]
    reasons: dict[str, Reason]
    faults: list[Fault] = field(default_factory=list)
    """In order of the nodes' names."""


def evaluate(
    graph: "nx.DiGraph[str]",
    stages: Mapping[str, Stage],
    store: Store,
    files: Fingerprints,
    workers: Workers,
    progress: Callable[[str], None] = lambda _: None,
    *,
    wanted: Iterable[str] = (),
    seconds_per_file: float | None = None,
    largest_file: int | None = None,
) -> Evaluation:
    """Bring every node of a graph up to date.

    A fault is not kept: the next run tries the node again. What depends on it is computed with None in its place.

    Parameters
    ----------
    graph
        As ``build_graph`` makes it.
    stages
        By name.
    store
        Open for writing.
    files
        Fingerprints of the input files.
    workers
        Where tasks are carried out.
    progress
        Called with the name of each node that was computed.
    wanted
        Nodes whose values the caller will read: a damaged one is computed again.
    seconds_per_file
        A stage that reads one file for longer gives what it gives for an unreadable file; None sets no limit.
    largest_file
        The same for a file that is larger [bytes] when it is unpacked.

    Raises
    ------
    StoreError
        A result cannot be kept.
    ClusterError
        The cluster cannot be used any more.
    """
    limits = seconds_per_file, largest_file
    return _Loop(graph, stages, store, files, workers, progress, tuple(wanted), limits).run()


class _Loop:
    """State of one evaluation at the edge: what is with the workers, what befell them."""

    def __init__(
        self,
        graph: "nx.DiGraph[str]",
        stages: Mapping[str, Stage],
        store: Store,
        files: Fingerprints,
        workers: Workers,
        progress: Callable[[str], None],
        wanted: tuple[str, ...],
        limits: tuple[float | None, int | None],
    ) -> None:
        self._graph = graph
        self._stages = stages
        self._store = store
        self._files = files
        self._workers = workers
        self._progress = progress
        self._wanted = wanted
        self._seconds_per_file, self._largest_file = limits
        self._past = store.past()
        self._values = Values(store)
        self._pace = Pace()
        self._readers = Counter(node.file for _, node in graph.nodes(data="node") if node.file is not None)
        self._files.look_ahead(sorted(self._readers))
        self._done: dict[str, tuple[Status, Reason]] = {}
        self._running: dict[Future[Results], list[Task]] = {}
        self._suspects: deque[Node] = deque()
        self._deaths: Counter[str] = Counter()
        self._changes: Counter[str] = Counter()
        self._mends = 0
        self._bring_files = False
        self._stale = False
        self._faults: dict[str, Fault] = {}
        self._schedule = self._begin()

    def _begin(self) -> Schedule:
        return Schedule(
            self._graph,
            self._stages,
            known=self._store.digest,
            past=self._past,
            file_digest=lambda path: self._files[path].digest,
            file_size=lambda path: self._files[path].size,
        )

    def run(self) -> Evaluation:
        """Work until nothing is out of date; what is finished is kept even when this is interrupted."""
        try:
            while self._send() or self._running or self._has_lost_wanted():
                if self._running:
                    self._receive(wait(self._running, return_when=FIRST_COMPLETED).done)
                if self._stale:
                    self._start_again()
        except BaseException:
            with contextlib.suppress(RateloomError):
                self._keep_finished()
                self._remember()
            raise
        self._remember()
        schedule = self._schedule
        status = schedule.status | {name: status for name, (status, _) in self._done.items()}
        reasons = schedule.reasons | {name: reason for name, (_, reason) in self._done.items()}
        faults = [self._faults[name] for name in sorted(self._faults)]
        return Evaluation(status, schedule.keys, schedule.digests, reasons, faults)

    def _send(self) -> bool:
        """Keep more batches with the workers than they can carry out at once; tell whether any was sent."""
        sent = False
        while len(self._running) < self._workers.room:
            try:
                batch = self._next_batch()
            except DamagedResultError:
                self._mend()
                continue
            if not batch:
                break
            self._running[self._workers.submit(batch)] = batch
            sent = True
        return sent

    def _next_batch(self) -> list[Task]:
        """Take ready nodes: one that reads a file alone, small stages together, one that may kill by itself."""
        if self._suspects:
            # Nothing else may be under way: the next death then has one culprit.
            return [] if self._running else [self._task(self._suspects.popleft())]
        if self._deaths and any(self._deaths[task.name] for batch in self._running.values() for task in batch):
            return []
        size = BatchSize(self._pace, self._schedule.ready, self._workers.count)
        batch: list[Task] = []
        while not size.full and (node := self._schedule.take()) is not None:
            if node.name in self._faults:
                self._finish(node.name, NO_VALUE, Status.FAULTY)
            elif self._deaths[node.name]:
                self._suspects.append(node)
            else:
                batch.append(self._task(node))
                size.add(node.stage)
                if node.file is not None:
                    break
        return batch or (self._next_batch() if self._suspects else [])

    def _task(self, node: Node) -> Task:
        if node.file is None:
            inputs = tuple((self._graph.nodes[source]["node"].stage, self._value(source)) for source in node.inputs)
            return Task(node.name, node.stage, node.parameters, inputs)
        state = self._files[node.file]
        return Task(
            node.name,
            node.stage,
            node.parameters,
            file=node.file,
            file_digest=state.sha256,
            file_error=state.error,
            file_data=_content(node.file) if self._bring_files and not state.error else None,
            seconds=self._seconds_per_file,
            largest=self._largest_file,
        )

    def _value(self, name: str) -> bytes:
        return self._values.load(self._schedule.keys[name], self._schedule.digests[name])

    def _has_lost_wanted(self) -> bool:
        """Look whether all that the caller will read is sound; mend the store and begin again where it is not."""
        keys, digests = self._schedule.keys, self._schedule.digests
        sound = not self._store.is_torn and all(
            digests[name] == NO_VALUE or self._store.value(keys[name]) is not None for name in self._wanted
        )
        if not sound:
            self._mend()
        return not sound

    def _mend(self) -> None:
        """Forget all damaged results and look at the whole graph again."""
        self._mends += 1
        if self._mends > MENDS_BORNE:
            msg = "the store was damaged again and again while in use. Check the disk, or use another with --output."
            raise StoreError(msg)
        self._store.mend()
        self._start_again()

    def _start_again(self) -> None:
        """Look at the whole graph afresh: all that is finished will be found."""
        while self._running:
            self._receive(wait(self._running).done)
        self._suspects.clear()
        self._schedule = self._begin()
        self._stale = False

    def _receive(self, futures: Iterable[Future[Results]]) -> None:
        """Keep what workers have finished and see to what they have not."""
        results: Results = []
        lost: list[tuple[Task, Exception]] = []
        futures = list(futures)
        for future in futures:
            try:
                results += future.result()
            except RateloomError:
                raise
            except Exception as error:
                lost += [(task, error) for task in self._running[future]]
        done = [result for result in results if isinstance(result, Done)]
        self._put(done)
        for future in futures:
            del self._running[future]
        for result in done:
            self._pace.note(self._graph.nodes[result.name]["node"].stage, result.seconds)
            self._finish(result.name, digest_of(result.value), Status.COMPUTED)
        for task, death in lost:
            self._lost(task, death)
        for undone in (result for result in results if isinstance(result, Undone)):
            self._undone(undone)

    def _put(self, done: list[Done]) -> None:
        keys = self._schedule.keys
        self._store.put((keys[result.name], result.value, result.remarks) for result in done)

    def _keep_finished(self) -> None:
        """Keep what has come in when the run was cut short."""
        for future in self._running:
            if future.done() and not future.cancelled() and future.exception() is None:
                self._put([result for result in future.result() if isinstance(result, Done)])

    def _finish(self, name: str, digest: bytes, status: Status) -> None:
        faulty = status is Status.FAULTY
        for other in self._schedule.finish(name, digest, faulty=faulty):
            if faulty:
                self._faults[other] = Fault(other, self._faults[name].detail)
                self._done[other] = status, self._schedule.reasons[other]
        self._done[name] = status, self._schedule.reasons[name]
        self._progress(name)

    def _fault(self, name: str, detail: str) -> None:
        self._faults[name] = Fault(name, detail)
        self._finish(name, NO_VALUE, Status.FAULTY)

    def _lost(self, task: Task, error: Exception) -> None:
        """A worker died over a task: try once more alone, then give the task up."""
        self._deaths[task.name] += 1
        if self._deaths[task.name] < DEATHS_BORNE:
            self._suspects.append(self._graph.nodes[task.name]["node"])
        else:
            cause = f"{type(error).__name__}: {str(error).strip().splitlines()[0] if str(error).strip() else ''}"
            self._fault(task.name, f"{DEATHS_BORNE} workers died over it (out of memory?); the last with {cause}")

    def _undone(self, result: Undone) -> None:
        """See to a task that gave no result."""
        node: Node = self._graph.nodes[result.name]["node"]
        if result.why == "fault" or node.file is None:
            self._fault(result.name, result.detail)
            return
        before = self._files[node.file]
        if result.why == "beyond-limits":
            self._files.give_up(node.file, result.detail)
        else:
            self._look_again(node.file, before)
        if self._readers[node.file] > 1 and self._files[node.file].digest != before.digest:
            # What others have read of the file does not go together with what is there now.
            self._stale = True
        self._schedule.give_back(node.name)

    def _look_again(self, file: str, before: FileState) -> None:
        """A worker did not find the file that was hashed: either it changed, or the worker sees another."""
        if self._files.again(file).digest == before.digest and not self._bring_files:
            self._bring_files = True
            return
        self._changes[file] += 1
        if self._changes[file] > CHANGES_BORNE:
            self._files.give_up(file, CHANGING)

    def _remember(self) -> None:
        """Note what the results are made of, for the next run."""
        schedule = self._schedule
        past = self._past
        same = past.keys() == schedule.keys.keys() and all(past[n].key == key for n, key in schedule.keys.items())
        if not same or self._done:
            past = {name: schedule.past_of(name) for name in schedule.digests}
            if schedule.waiting:
                # A run that was cut short has not looked at every node: what was known of the others still holds.
                past = self._past | past
        self._store.remember(past, self._files.states)


def _content(file: str) -> bytes | None:
    """Read a file for a worker that cannot see it; None where it is gone, which the worker will say."""
    try:
        return Path(file).read_bytes()
    except OSError:
        return None
