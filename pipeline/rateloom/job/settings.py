"""Settings that entries share: temperature grids, fits and scale factors, the special ones over the general ones."""

import math
from collections.abc import Callable
from types import MappingProxyType

from rateloom.job.model import FitSettings, FrequencyScale
from rateloom.job.schema import FitEntry, GridEntry, ScaleEntry

_MAPS: MappingProxyType[str, tuple[Callable[[float], float], Callable[[float], float]]] = MappingProxyType(
    {
        "linear": (float, float),
        "reciprocal": (lambda t: 1.0 / t, lambda x: 1.0 / x),
        "log": (math.log, math.exp),
    }
)
"""What is evenly spaced in each grid, and the way back."""


def temperatures_of(entry: GridEntry | list[float]) -> tuple[float, ...]:
    """Make ascending temperatures [K] of a grid or a list."""
    return _grid(entry) if isinstance(entry, GridEntry) else tuple(sorted(entry))


def _grid(entry: GridEntry) -> tuple[float, ...]:
    forth, back = _MAPS[entry.spacing]
    low, high = forth(entry.start), forth(entry.to)
    step = (high - low) / (entry.count - 1)
    inner = (back(low + index * step) for index in range(1, entry.count - 1))
    return (entry.start, *inner, entry.to)  # the ends as written, free of rounding


def fit_of(*entries: FitEntry | None) -> FitSettings:
    """Put fit settings together, the later ones over the earlier ones."""
    given = {
        key: value
        for entry in entries
        if entry is not None
        for key, value in entry.model_dump(exclude_none=True).items()
    }
    return FitSettings(**given)


def scale_of(entry: ScaleEntry | float | None, default: FrequencyScale) -> FrequencyScale:
    """Make scale factors of one number, of two, or of the default."""
    if entry is None:
        return default
    if isinstance(entry, ScaleEntry):
        return FrequencyScale(entry.zero_point, entry.modes)
    return FrequencyScale(entry, entry)
