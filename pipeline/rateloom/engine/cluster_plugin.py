"""What the scheduler of a cluster is told about our batches; imported by the scheduler's process too."""

from typing import Any

from distributed import SchedulerPlugin


class TellFirstDeath(SchedulerPlugin):
    """Make the death of a worker fail our batches at once, so that the culprit among their stages can be found.

    Left to itself a scheduler gives a batch to one worker after another and lets it kill each. Batches of other users
    are not touched.

    Parameters
    ----------
    prefix
        How the keys of our batches begin.
    """

    def __init__(self, prefix: str) -> None:
        self.name = self.prefix = prefix

    def update_graph(self, scheduler: Any, *, tasks: list[Any], **_: Any) -> None:
        """Count new batches as having used up the deaths that the scheduler allows."""
        for key in tasks:
            if isinstance(key, str) and key.startswith(self.prefix) and key in scheduler.tasks:
                scheduler.tasks[key].suspicious = scheduler.allowed_failures
