"""How long stages take, and so how many small ones to send together."""

BATCH_SECONDS = 0.1
"""Long beside what sending costs (about a millisecond), short beside a run."""
BATCH_MOST = 64
FIRST_GUESS = 0.01


class Pace:
    """Mean time of each stage, recent results first."""

    def __init__(self) -> None:
        self._seconds: dict[str, float] = {}

    def note(self, stage: str, seconds: float) -> None:
        """Take a finished task into account."""
        before = self._seconds.get(stage, seconds)
        self._seconds[stage] = before + 0.1 * (seconds - before)

    def expected(self, stage: str) -> float:
        """Tell how long the next task of a stage is likely to take [s]."""
        return self._seconds.get(stage, FIRST_GUESS)


class BatchSize:
    """Says when a batch is full: by time, by number, or because other workers would go without.

    Parameters
    ----------
    pace
        What is known of the stages.
    ready
        Nodes that wait.
    count
        Workers that want some of them.
    """

    def __init__(self, pace: Pace, ready: int, count: int) -> None:
        self._pace = pace
        self._left = min(BATCH_MOST, -(-ready // count))
        self._seconds = BATCH_SECONDS

    def add(self, stage: str) -> None:
        """Count one task."""
        self._left -= 1
        self._seconds -= self._pace.expected(stage)

    @property
    def full(self) -> bool:
        """Whether no other task should join."""
        return self._left <= 0 or self._seconds <= 0
