"""Workers of a Dask cluster that somebody else started: tasks go out as bytes, results come back to this process.

Ready stages start without waiting for others, a worker may come or go at any time, and the files are read by the
workers where they can see them. The extra ``cluster`` installs what this needs; nothing else imports it.
"""

import os
import threading
import time
import warnings
from collections.abc import Sequence
from concurrent.futures import Future
from dataclasses import dataclass
from functools import cache, partial
from typing import Any

from rateloom import __version__
from rateloom.engine.codec import decode, digest_of, encode
from rateloom.engine.stage import Task
from rateloom.engine.workers import Results, run_batch, table_of
from rateloom.errors import ClusterError, RateloomError

CONNECT_SECONDS = 10.0
WATCH_SECONDS = 2.0
"""Between two looks at how many workers there are."""


@dataclass(frozen=True, slots=True)
class TlsFiles:
    """Files of a ``tls://`` address, for a user who has not named them in the configuration of Dask."""

    authority: str
    """Certificate of the authority that signed those of the cluster."""
    certificate: str
    key: str


def run_remotely(stages: str, release: str, table: bytes, tasks: bytes) -> Results:
    """Carry out a batch in a worker of the cluster.

    Parameters
    ----------
    stages
        ``module:name`` of the table of stages.
    release, table
        Version of the program, and digest of the table's versions, that asks.
    tasks
        Encoded: looked at only after the versions.

    Raises
    ------
    ClusterError
        This worker runs another version.
    """
    if (release, table) != (__version__, versions_of(stages)):
        what = f"rateloom {__version__}" if release != __version__ else f"rateloom {__version__} with other stages"
        msg = (
            f"a worker on {os.uname().nodename} runs {what}, this is rateloom {release}. "
            "Install the same version on every machine and start the workers again."
        )
        raise ClusterError(msg)
    return run_batch(stages, decode(tasks, list[Task]))


@cache
def versions_of(stages: str) -> bytes:
    """Digest of the versions of all stages of a table."""
    return digest_of(encode({name: stage.version for name, stage in table_of(stages).items()}))


class Cluster:
    """Workers of a Dask scheduler.

    Parameters
    ----------
    address
        ``tcp://host:port`` or ``tls://host:port``.
    stages
        ``module:name`` of the table of stages.
    tls
        Certificates; None takes those of the user's Dask configuration.
    patience
        How long to wait for a first worker, or for another when the last has gone [s].

    Raises
    ------
    ClusterError
        There is no such scheduler, or no worker has joined it.
    """

    def __init__(self, address: str, stages: str, *, tls: TlsFiles | None = None, patience: float = 60.0) -> None:
        self._address = address
        self._stages = stages
        self._patience = patience
        self._client = _connect(address, tls)
        self._run = f"rateloom-{os.urandom(6).hex()}"
        self._sent = 0
        self._open: dict[str, tuple[Any, Future[Results]]] = {}
        self._lock = threading.Lock()
        self._closed = threading.Event()
        self._workers = 0
        try:
            self._register()
            self._await_worker()
        except BaseException:
            self.close(now=True)
            raise
        threading.Thread(target=self._watch, name="cluster watch", daemon=True).start()

    @property
    def count(self) -> int:
        """How many batches the workers carry out at the same time, at last count."""
        return max(self._workers, 1)

    @property
    def room(self) -> int:
        """How many batches to hand over."""
        return 2 * self.count

    def _register(self) -> None:
        """Have the death of a worker told at once; a scheduler that refuses tells it after some more deaths."""
        from rateloom.engine.cluster_plugin import TellFirstDeath

        try:
            self._client.register_plugin(TellFirstDeath(self._run))
        except Exception as error:
            warnings.warn(f"the scheduler {self._address} took no plugin ({error})", RuntimeWarning, stacklevel=2)

    def _await_worker(self) -> None:
        try:
            self._client.wait_for_workers(1, timeout=self._patience)
            self._workers = sum(self._client.nthreads().values())
        except TimeoutError:
            raise ClusterError(self._no_worker()) from None
        except (OSError, ValueError) as error:
            raise ClusterError(_unreachable(self._address, error)) from error

    def _no_worker(self) -> str:
        return (
            f"the scheduler {self._address} has had no worker for {self._patience:g} s. "
            f"Start one with: dask worker {self._address} --nthreads 1"
        )

    def submit(self, tasks: Sequence[Task]) -> "Future[Results]":
        """Send a batch to the cluster."""
        self._sent += 1
        key = f"{self._run}-{self._sent}"
        local: Future[Results] = Future()
        work = (self._stages, __version__, versions_of(self._stages), encode(list(tasks)))
        try:
            with warnings.catch_warnings():
                warnings.filterwarnings("ignore", message="Sending large graph")  # a file that is brought along
                remote = self._client.submit(run_remotely, *work, key=key, pure=False)
        except Exception as error:
            raise ClusterError(_unreachable(self._address, error)) from error
        with self._lock:
            self._open[key] = remote, local
        remote.add_done_callback(partial(self._arrived, key))
        return local

    def _arrived(self, key: str, remote: Any) -> None:
        """Hand a finished batch on; called in a thread of the client."""
        result: Results | None = None
        error: BaseException | None = None
        try:
            if remote.status == "cancelled":
                error = ClusterError(_gone(self._address))
            else:
                result = remote.result()
        except RateloomError as stop:
            error = stop
        except (ImportError, AttributeError) as missing:
            error = ClusterError(
                f"the workers of {self._address} cannot run this version of rateloom ({missing}). "
                "Install the same version on every machine and start the workers again."
            )
        except BaseException as lost:
            running = self._client.status == "running"
            error = lost if running and isinstance(lost, Exception) else ClusterError(_gone(self._address))
        self._settle(key, result, error)

    def _settle(self, key: str, result: Results | None, error: BaseException | None) -> None:
        with self._lock:
            remote, local = self._open.pop(key, (None, None))
        if local is not None and error is not None:
            local.set_exception(error)
        elif local is not None and result is not None:
            local.set_result(result)
        if remote is not None:
            remote.release()

    def _watch(self) -> None:
        """Count the workers, and give up when there has been none for too long."""
        last_seen = time.monotonic()
        while not self._closed.wait(min(WATCH_SECONDS, self._patience)):
            try:
                self._workers = sum(self._client.nthreads().values())
            except Exception:  # the callbacks of the batches tell that the scheduler has gone
                continue
            if self._workers:
                last_seen = time.monotonic()
            elif time.monotonic() - last_seen > self._patience:
                for key in list(self._open):
                    self._settle(key, None, ClusterError(self._no_worker()))

    def close(self, *, now: bool) -> None:
        """Leave the cluster, which goes on without us."""
        self._closed.set()
        with self._lock:
            remotes = [remote for remote, _ in self._open.values()]
            self._open.clear()
        try:
            if self._client.status == "running":
                if now and remotes:
                    self._client.cancel(remotes, force=True)
                self._client.unregister_scheduler_plugin(self._run)
        except Exception as error:  # the scheduler may be gone
            del error
        self._client.close(timeout=5)


def _connect(address: str, tls: TlsFiles | None) -> Any:
    """Connect to a scheduler; gives a client of distributed, whose methods have no types."""
    try:
        import distributed
    except ImportError as error:
        msg = "a cluster needs the package distributed. Install it with: pip install 'rateloom[cluster]'"
        raise ClusterError(msg) from error
    dask: Any = distributed
    try:
        security = None
        if tls is not None:
            security = dask.Security(
                tls_ca_file=tls.authority,
                tls_client_cert=tls.certificate,
                tls_client_key=tls.key,
                require_encryption=True,
            )
        return dask.Client(address, security=security, timeout=CONNECT_SECONDS, set_as_default=False)
    except Exception as error:
        raise ClusterError(_unreachable(address, error)) from error


def _unreachable(address: str, error: BaseException) -> str:
    why = str(error).strip().splitlines()[0] if str(error).strip() else type(error).__name__
    return (
        f"the Dask scheduler {address} cannot be reached: {why}. "
        "Check that it runs and that the address is the one it printed (tls:// needs its certificates)."
    )


def _gone(address: str) -> str:
    return f"the Dask scheduler {address} has gone. All that was finished is kept: start it and run again."
