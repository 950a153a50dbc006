"""A toy job for the engine: files of numbers, read and added up."""

from collections.abc import Iterable
from pathlib import Path
from typing import Any

from toy_stages import STAGES, Numbers, Shift

from rateloom.engine import Evaluation, Fingerprints, Node, Store, build_graph, decode, encode, evaluate, open_store
from rateloom.engine.workers import InProcess, Workers

TABLE = "toy_stages:STAGES"


class Toy:
    """Files of numbers, a sum of each pair of neighbours, and the sum of all."""

    def __init__(self, folder: Path, diary: Path) -> None:
        self.folder = folder
        self.output = folder / "out"
        self.stages = dict(STAGES)
        self.nodes: dict[str, Node] = {}
        self._diary = diary

    def write(self, name: str, text: str) -> Path:
        """Write an input file, old enough for its time stamp to be trusted."""
        path = self.folder / name
        path.write_text(text, encoding="utf-8")
        return path

    def read(self, name: str, file: str | Path, *, by: float = 0.0, mode: str = "") -> None:
        """Add a node that reads a file."""
        self.nodes[name] = Node(name, "read", encode(Shift(by, mode)), file=str(file))

    def add(self, name: str, inputs: Iterable[str] = (), *, by: float = 0.0, mode: str = "") -> None:
        """Add a node that adds up others."""
        self.nodes[name] = Node(name, "add", encode(Shift(by, mode)), tuple(inputs))

    def chain(self, count: int) -> None:
        """Lay out ``count`` files, the sums of neighbours and the sum of all."""
        for i in range(count):
            self.write(f"{i}.txt", f"{i} 0.5")
            self.read(f"read {i}", self.folder / f"{i}.txt")
        for i in range(count - 1):
            self.add(f"pair {i}", (f"read {i}", f"read {i + 1}"))
        self.add("total", [f"pair {i}" for i in range(count - 1)])

    def run(self, workers: Workers | None = None, **options: Any) -> Evaluation:
        """Bring all up to date."""
        with open_store(self.output) as store:
            return self.run_in(store, workers, **options)

    def run_in(self, store: Store, workers: Workers | None = None, **options: Any) -> Evaluation:
        """Bring all up to date in an open store."""
        workers = workers or InProcess(TABLE)
        ended = False
        try:
            files = options.pop("files", None) or Fingerprints(store.files())
            graph = build_graph(self.nodes.values())
            result = evaluate(graph, self.stages, store, files, workers, **options)
            ended = True
        finally:
            workers.close(now=not ended)
        return result

    def value(self, evaluation: Evaluation, name: str) -> list[float] | None:
        """Read the value of a node from the store."""
        with open_store(self.output) as store:
            data = store.value(evaluation.keys[name])
        assert data is not None
        numbers = decode(data, Numbers | None)
        return None if numbers is None else [float(x) for x in numbers.values]

    def diary(self) -> list[str]:
        """Give what the stages did since the last time asked."""
        path = self._diary / "diary.txt"
        lines = path.read_text(encoding="utf-8").splitlines() if path.exists() else []
        path.unlink(missing_ok=True)
        return lines
