"""The engine: a graph of named pure stages, evaluated once and never again for equal inputs.

Takes a graph of ``Node`` (built elsewhere), a table of ``Stage`` and a ``Store``; gives for every node the digest
of its result and what was computed, reused or went wrong. Knows nothing of chemistry, job files or tables.
"""

from rateloom.engine.cluster import Cluster, TlsFiles
from rateloom.engine.codec import decode, digest_of, encode
from rateloom.engine.evaluate import Evaluation, Fault, evaluate
from rateloom.engine.files import FileState, Fingerprints
from rateloom.engine.schedule import Reason, Schedule, Status
from rateloom.engine.stage import Node, Outcome, Stage, Task, build_graph, run_task
from rateloom.engine.store import Store, open_store, read_store
from rateloom.engine.store_file import STORE_NAME
from rateloom.engine.workers import InProcess, Processes, Workers

__all__ = [
    "STORE_NAME",
    "Cluster",
    "Evaluation",
    "Fault",
    "FileState",
    "Fingerprints",
    "InProcess",
    "Node",
    "Outcome",
    "Processes",
    "Reason",
    "Schedule",
    "Stage",
    "Status",
    "Store",
    "Task",
    "TlsFiles",
    "Workers",
    "build_graph",
    "decode",
    "digest_of",
    "encode",
    "evaluate",
    "open_store",
    "read_store",
    "run_task",
]
