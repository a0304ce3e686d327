"""What is drawn where, on a grid of 1 point, and the place for a text that covers least of it."""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    import numpy as np

Box = tuple[float, float, float, float]
"""Left, bottom, right, top in points."""
Place = tuple[float, float]
Polyline = list[Place]

MOST_SAMPLES = 400_000
"""Places at which one curve is entered on the grid; a longer one has blackened the page."""
CLEAR = 2.5
"""Points kept free around a text."""
OFF_PICTURE, OFF_PANEL = 1e6, 300.0
"""Cost of each point by which a text leaves the picture, or its panel."""
OVER_TEXT, OVER_LINE, CROSSED, NEAR_LINE = 1000.0, 40.0, 4.0, 6.0
"""Cost of each cell of a text or a line that is covered, of each cell of another line that a leader crosses,
and of standing as near to another line as to one's own."""


@dataclass(frozen=True, slots=True)
class Spot:
    """A place proposed for a text."""

    box: Box
    """Of its ink."""
    cost: float
    """What speaks against it before anything else is drawn."""
    leader: tuple[Place, Place] | None
    """A thin line from the text to what it names, where it stands off."""


class Room:
    """The picture's area from (0, 0) to (width, height)."""

    def __init__(self, width: float, height: float) -> None:
        import numpy as np

        self.width, self.height = width, height
        shape = (math.ceil(height) + 1, math.ceil(width) + 1)
        self._texts = np.zeros(shape, dtype=np.int16)
        self._lines = np.zeros(shape, dtype=np.int16)

    def add_line(self, line: Polyline) -> None:
        """Enter a line once in every cell that it passes."""
        self._lines += self._passed(line)

    def add_text(self, box: Box) -> None:
        """Enter what no text may cover."""
        self._texts[self._cells(box, 0.0)] += 1

    def best(self, spots: Iterable[Spot], own: Polyline, within: Box) -> Spot:
        """The cheapest spot, the first of those that cost the same.

        `own` is the line that the text may stand beside, `within` the panel that it should not leave.
        """
        alone = self._passed(own)
        rising = sorted(spots, key=lambda spot: spot.cost)
        found, least = rising[0], math.inf
        for spot in rising:
            if spot.cost >= least:
                break
            cost = self._cost(spot, alone, within)
            if cost < least:
                found, least = spot, cost
        return found

    def _cost(self, spot: Spot, own: np.ndarray[Any, Any], within: Box) -> float:
        import numpy as np

        cost = spot.cost + OFF_PANEL * _beyond(spot.box, within)
        cost += OFF_PICTURE * _beyond(spot.box, (1.0, 1.0, self.width - 1, self.height - 1))
        cost += OVER_TEXT * int(np.count_nonzero(self._texts[self._cells(spot.box, CLEAR)]))
        cost += OVER_LINE * int(np.count_nonzero(self._lines[self._cells(spot.box, 1.6)]))
        around = self._cells(spot.box, 2 * CLEAR)
        cost += NEAR_LINE * bool((self._lines[around] > own[around]).any())
        if spot.leader:
            on = self._on(list(spot.leader), 2.0)
            cost += OVER_TEXT * int(np.count_nonzero(self._texts[on]))
            cost += CROSSED * int(np.count_nonzero(self._lines[on] > own[on]))
        return cost

    def _cells(self, box: Box, more: float) -> tuple[slice, slice]:
        left, bottom, right, top = box
        return (
            slice(max(math.floor(bottom - more), 0), max(math.ceil(top + more), 0)),
            slice(max(math.floor(left - more), 0), max(math.ceil(right + more), 0)),
        )

    def _passed(self, line: Polyline) -> np.ndarray[Any, Any]:
        """1 in the cells that a line passes, else 0."""
        import numpy as np

        grid = np.zeros(self._lines.shape, dtype=np.int16)
        grid[self._on(line, 0.7)] = 1
        return grid

    def _on(self, line: Polyline, spacing: float) -> tuple[np.ndarray[Any, Any], np.ndarray[Any, Any]]:
        """Rows and columns of the cells along a line."""
        import numpy as np

        points, (rows, columns) = along(line, spacing), self._lines.shape
        return (
            np.clip(points[:, 1].astype(int), 0, rows - 1),
            np.clip(points[:, 0].astype(int), 0, columns - 1),
        )


def _beyond(box: Box, bounds: Box) -> float:
    """Points by which a box leaves the bounds."""
    return max(0.0, bounds[0] - box[0], bounds[1] - box[1], box[2] - bounds[2], box[3] - bounds[3])


def along(line: Polyline, spacing: float) -> np.ndarray[Any, Any]:
    """Places along a line, its corners among them, so far apart at most (more on very long ones); (n, 2)."""
    import numpy as np

    corners = np.asarray(line, dtype=float).reshape(-1, 2)
    if len(corners) < 2:
        return corners
    legs = np.diff(corners, axis=0)
    lengths = np.hypot(legs[:, 0], legs[:, 1])
    counts = np.ceil(lengths / max(spacing, lengths.sum() / MOST_SAMPLES)).astype(int) + 1
    leg = np.repeat(np.arange(len(legs)), counts)
    part = (np.arange(counts.sum()) - np.repeat(counts.cumsum() - counts, counts)) / counts[leg]
    return np.concatenate([corners[leg] + legs[leg] * part[:, None], corners[-1:]])
