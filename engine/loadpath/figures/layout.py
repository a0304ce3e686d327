"""Where everything of a plot stands: lines, dots and lettering in points, y upwards from the bottom.

Axes are labelled with quantity and unit, `M(x) in kN⋅m`, one of the ways of ISO 80000-1 (from memory). A
power of ten that is taken out of the numbers stands before the unit.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, field, replace

from loadpath.figures.lettering import LABEL, SMALL, Outline, Piece, named, outline, variable
from loadpath.figures.picture import Curve, Picture, panels, runs
from loadpath.figures.room import Box, Place, Polyline, Room, Spot, along
from loadpath.figures.scale import Scale, scale
from loadpath.units.printing import NARROW, superscript

WIDTH = 468.0
"""165 mm, the column of an A4 page."""
MOST_HEIGHT = 690.0
PANEL_HEIGHTS = {1: 165.0, 2: 128.0, 3: 108.0}
LEAST_PANEL, OTHER_PANEL, MORE = 26.0, 92.0, 12.0
"""Points; `MORE` for each curve of the fullest panel after the third."""
EDGE = 3.0
HEAD = 20.0
"""Above a panel, for its label and for texts of its peaks."""
BELOW, CLOSE = 18.0, 8.0
"""Below a panel that has negative values, for texts of its peaks, and below another one."""
TICK, GAP = 3.5, 3.0
AXIS, FINE = 0.5, 0.35
DOT, LONE = 1.7, 1.0
MISTAKEN, CLEARLY = 200.0, 3.0
"""Cost of a text that another dot is as near to, within so many points, as its own."""
DASHES: tuple[tuple[float, ...], ...] = ((), (6.0, 2.8), (1.3, 2.2), (8.0, 2.4, 1.4, 2.4))
WEIGHTS = (1.0, 0.55, 1.7)
"""Of curves one to four of a panel, five to eight, nine to twelve."""
HALF_HEIGHT = 0.33
"""Middle of digits above their line, as a part of the size."""


@dataclass(frozen=True, slots=True)
class Line:
    """A drawn line."""

    points: Polyline
    weight: float
    dashes: tuple[float, ...] = ()


@dataclass(frozen=True, slots=True)
class Text:
    """Drawn lettering: its outline moved by (x, y)."""

    outline: Outline
    x: float
    y: float

    @property
    def box(self) -> Box:
        left, bottom, right, top = self.outline.box
        return left + self.x, bottom + self.y, right + self.x, top + self.y


@dataclass(slots=True)
class Drawing:
    """All of a plot, to be drawn in this order."""

    height: float
    room: Room
    lines: list[Line] = field(default_factory=list)
    dots: list[tuple[Place, float]] = field(default_factory=list)
    """Middle and radius."""
    texts: list[Text] = field(default_factory=list)

    def write(self, text: Text) -> None:
        self.texts.append(text)
        self.room.add_text(text.box)

    def rule(self, start: Place, end: Place, weight: float = AXIS) -> None:
        self.lines.append(Line([start, end], weight))
        self.room.add_line([start, end])

    def dot(self, middle: Place, radius: float) -> None:
        self.dots.append((middle, radius))
        (x, y), half = middle, 0.6 * radius  # so that its cells end short of where its leader begins
        self.room.add_text((x - half, y - half, x + half, y + half))


@dataclass(frozen=True, slots=True)
class Frame:
    """The area of one panel with its scales."""

    left: float
    right: float
    bottom: float
    top: float
    x: Scale
    y: Scale
    curves: list[Curve]

    def place(self, x: float, y: float) -> Place:
        return self.left + self.x.place(x) * (self.right - self.left), self._up(self.y.place(y))

    def _up(self, part: float) -> float:
        return self.bottom + part * (self.top - self.bottom)

    def tick_x(self, value: float) -> float:
        return self.left + (value - self.x.low) / (self.x.high - self.x.low) * (self.right - self.left)

    def tick_y(self, value: float) -> float:
        return self._up((value - self.y.low) / (self.y.high - self.y.low))

    @property
    def room(self) -> Box:
        """Where the texts of its curves belong."""
        floor = self.bottom if self.y.low == 0 else self.bottom - BELOW + 1.5
        return EDGE, floor, WIDTH - EDGE, self.top + HEAD - EDGE

    def runs(self, curve: Curve) -> list[Polyline]:
        """The curve between its gaps, in points."""
        return [[self.place(x, y) for x, y in run] for run in runs(curve.points)]


def layout(picture: Picture) -> Drawing:
    """Everything in its place, for a picture that is `normal`."""
    frames, height = _frames(picture)
    drawing = Drawing(height, Room(WIDTH, height))
    for frame in frames:
        _draw_y_axis(drawing, frame)
        _draw_zero(drawing, frame, with_ticks=frame is not frames[-1])
    _draw_x_axis(drawing, frames[-1], picture)
    for frame in frames:
        _draw_curves(drawing, frame)
    for frame in frames:
        for curve in frame.curves:
            _name_peaks(drawing, frame, curve)
    for frame in frames:
        if len(frame.curves) > 1:
            for curve in frame.curves:
                _name_curve(drawing, frame, curve)
    return drawing


# --- axes ---------------------------------------------------------------------------------------------------


def _frames(picture: Picture) -> tuple[list[Frame], float]:
    """The panels from top to bottom, and the height of the picture."""
    groups = panels(picture)
    foot = 2 * EDGE + TICK + GAP + 2.6 * SMALL + BELOW
    most = (MOST_HEIGHT - foot) / len(groups) - HEAD - BELOW
    wished = PANEL_HEIGHTS.get(len(groups), OTHER_PANEL) + MORE * max(max(map(len, groups)) - 3, 0)
    tall = max(min(wished, math.floor(most)), LEAST_PANEL)
    ys = [_y_scale(group, max(int(tall / 22), 3)) for group in groups]
    left = EDGE + TICK + GAP + max(_small(label).advance for y in ys for _, label in y.ticks)
    x, right = _x_scale(picture, left)
    height = foot - BELOW
    frames: list[Frame] = []
    for group, y in zip(reversed(groups), reversed(ys), strict=True):
        height += BELOW if y.low else CLOSE if frames else 0.0
        frames.append(Frame(left, right, height, height + tall, x, y, group))
        height += tall + HEAD
    return frames[::-1], math.ceil(height + EDGE)


def _y_scale(curves: list[Curve], most: int) -> Scale:
    values = [y for c in curves for _, y in c.points if math.isfinite(y)]
    values += [p.y for c in curves for p in c.peaks]
    return scale(min(values, default=0.0), max(values, default=0.0), most, values_axis=True)


def _x_scale(picture: Picture, left: float) -> tuple[Scale, float]:
    """The x axis and its right end, with as many ticks as have room for their labels."""
    values = [x for c in picture.curves for x, _ in c.points] + [p.x for c in picture.curves for p in c.peaks]
    for most in (11, 9, 7, 5, 4, 3):
        x = scale(min(values), max(values), most, values_axis=False)
        widest = max(_small(label).advance for _, label in x.ticks)
        right = WIDTH - EDGE - max(widest / 2, 10.0)
        apart = (x.ticks[1][0] - x.ticks[0][0]) / (x.high - x.low) * (right - left)
        if apart > widest + 10:
            break
    return x, right


def _small(text: str) -> Outline:
    return outline([Piece(text)], SMALL, WIDTH - 2 * EDGE)


def _draw_y_axis(drawing: Drawing, frame: Frame) -> None:
    drawing.rule((frame.left, frame.bottom), (frame.left, frame.top))
    for value, label in frame.y.ticks:
        y = frame.tick_y(value)
        drawing.rule((frame.left - TICK, y), (frame.left, y))
        shape = _small(label)
        drawing.write(Text(shape, frame.left - TICK - GAP - shape.advance, y - HALF_HEIGHT * SMALL))
    names = list(dict.fromkeys((c.name, c.symbol) for c in frame.curves))
    pieces = [piece for i, name in enumerate(names) for piece in [Piece(", ")] * (i > 0) + named(*name)]
    unit = _unit(frame.curves[0].unit, frame.y.power)
    if outline(pieces, LABEL, math.inf).advance > 0.55 * WIDTH:
        pieces, unit = [], unit.removeprefix(" in ")
    drawing.write(Text(outline([*pieces, Piece(unit)], LABEL, WIDTH - 2 * EDGE), EDGE, frame.top + 10.0))


def _unit(unit: str, power: int) -> str:
    factor = "10" + superscript(str(power)) if power else ""
    return " in " + factor + NARROW * bool(factor and unit) + unit if factor or unit else ""


def _draw_zero(drawing: Drawing, frame: Frame, *, with_ticks: bool) -> None:
    if not frame.y.low <= 0 <= frame.y.high:
        return
    zero = frame.tick_y(0.0)
    drawing.rule((frame.left, zero), (frame.right, zero), AXIS if frame.y.low == 0 else FINE)
    for value, _ in frame.x.ticks if with_ticks else ():
        drawing.rule((frame.tick_x(value), zero), (frame.tick_x(value), zero - 2.0), FINE)


def _draw_x_axis(drawing: Drawing, frame: Frame, picture: Picture) -> None:
    y = frame.bottom - (BELOW if frame.y.low else 0.0)
    drawing.rule((frame.left, y), (frame.right, y))
    for value, label in frame.x.ticks:
        x = frame.tick_x(value)
        drawing.rule((x, y), (x, y - TICK))
        shape = _small(label)
        drawing.write(Text(shape, x - shape.advance / 2, y - TICK - GAP - 0.7 * SMALL))
    pieces = [*variable(picture.x_name), Piece(_unit(picture.x_unit, frame.x.power))]
    shape = outline(pieces, LABEL, WIDTH - 2 * EDGE)
    drawing.write(Text(shape, max(frame.right - shape.advance, EDGE), EDGE + 0.28 * LABEL))


# --- curves -------------------------------------------------------------------------------------------------


def _draw_curves(drawing: Drawing, frame: Frame) -> None:
    empty = [c.name for c in frame.curves if not frame.runs(c)]
    if empty:
        shape = _small(", ".join(empty) + (" has" if len(empty) == 1 else " have") + " no value here")
        middle = (frame.left + frame.right - shape.advance) / 2
        drawing.write(Text(shape, max(middle, EDGE), frame.bottom + 0.25 * (frame.top - frame.bottom)))
    for curve in frame.curves:
        for peak in dict.fromkeys(curve.peaks):
            drawing.dot(frame.place(peak.x, peak.y), DOT)
    for number, curve in enumerate(frame.curves):
        for run in frame.runs(curve):
            if len(set(run)) == 1:
                drawing.dot(run[0], LONE)
                continue
            drawing.lines.append(Line(run, WEIGHTS[number // len(DASHES)], DASHES[number % len(DASHES)]))
            drawing.room.add_line(run)


def _name_peaks(drawing: Drawing, frame: Frame, curve: Curve) -> None:
    own = [place for run in frame.runs(curve) for place in run]
    for peak in dict.fromkeys(curve.peaks):
        shape, dot = _small(peak.text), frame.place(peak.x, peak.y)
        others = [middle for middle, _ in drawing.dots if middle != dot]
        spots = (_away_from(others, dot, spot) for spot in _spots_at(dot, shape, upwards=peak.y >= 0))
        _write_at(drawing, drawing.room.best(spots, own, frame.room), shape)


def _name_curve(drawing: Drawing, frame: Frame, curve: Curve) -> None:
    lines = frame.runs(curve)
    if not lines:
        return
    shape = outline(named(curve.name, curve.symbol), LABEL, 0.4 * WIDTH)
    longest = max(lines, key=lambda line: abs(line[-1][0] - line[0][0]))
    spot = drawing.room.best(_spots_along(longest, shape, frame), longest, frame.room)
    _write_at(drawing, spot, shape)


def _write_at(drawing: Drawing, spot: Spot, shape: Outline) -> None:
    drawing.write(Text(shape, spot.box[0] - shape.box[0], spot.box[1] - shape.box[1]))
    if spot.leader:
        drawing.rule(*spot.leader, FINE)


def _spots_at(place: Place, shape: Outline, *, upwards: bool) -> Iterator[Spot]:
    """Around a dot: away from the zero line first, then to its sides, then farther off with a leader."""
    x, y = place
    wide, high = shape.box[2] - shape.box[0], shape.box[3] - shape.box[1]

    def spot(left: float, bottom: float, cost: float) -> Spot:
        left = min(max(left, EDGE), max(WIDTH - EDGE - wide, EDGE))
        box = (left, bottom, left + wide, bottom + high)
        return Spot(box, cost + 0.4 * _distance(place, box), _leader(place, box))

    for off in (DOT + 4.5, 12.0, 20.0, 32.0, 46.0, 64.0):
        for above in (True, False):
            bottom = y + off if above else y - off - high
            for shift, align in enumerate((0.5, 0.0, 1.0, 0.25, 0.75, -0.15, 1.15, -0.6, 1.6)):
                yield spot(x - align * wide, bottom, 0.4 * shift + 2.0 * (above != upwards))
        for left in (x + off, x - off - wide):
            for lift in (0.0, 0.6 * high, -0.6 * high):
                yield spot(left, y - high / 2 + lift, 1.5 + (lift != 0))


def _away_from(others: list[Place], own: Place, spot: Spot) -> Spot:
    """The spot, dearer where another dot is as near: a value must not be read at the wrong one."""
    far = min((_distance(other, spot.box) for other in others), default=math.inf)
    return replace(spot, cost=spot.cost + MISTAKEN) if far <= _distance(own, spot.box) + CLEARLY else spot


def _distance(place: Place, box: Box) -> float:
    x, y = place
    return math.hypot(max(box[0] - x, x - box[2], 0.0), max(box[1] - y, y - box[3], 0.0))


def _spots_along(line: Polyline, shape: Outline, frame: Frame) -> Iterator[Spot]:
    """Beside a curve, close to it, then farther off with a leader; rather in the middle than at the ends."""
    wide, high = shape.box[2] - shape.box[0], shape.box[3] - shape.box[1]
    points = along(line, 4.0)
    for x, y in points[:: max(len(points) // 50, 1)].tolist():
        central = 3.0 * abs((x - frame.left) / (frame.right - frame.left) - 0.5)
        for ring, off in enumerate((4.0, 9.0, 18.0, 30.0)):
            for cost, left, bottom in (
                (0.0, x - wide / 2, y + off),
                (0.2, x - wide / 2, y - off - high),
                (0.3, x + off, y - high / 2),
                (0.3, x - off - wide, y - high / 2),
                (0.5, x + off * 0.7, y + off * 0.7),
                (0.5, x - off * 0.7 - wide, y + off * 0.7),
                (0.5, x + off * 0.7, y - off * 0.7 - high),
                (0.5, x - off * 0.7 - wide, y - off * 0.7 - high),
            ):
                box = (left, bottom, left + wide, bottom + high)
                yield Spot(box, cost + central + 8.0 * ring, _leader((x, y), box) if ring else None)


def _leader(place: Place, box: Box) -> tuple[Place, Place] | None:
    """From just outside the place to the nearest point of the box, with a hair between."""
    x, y = place
    left, bottom, right, top = box
    to = (min(max(x, left), right), min(max(y, bottom), top))
    length = math.hypot(to[0] - x, to[1] - y)
    if length < 8.0:
        return None
    a, b = (to[0] - x) / length, (to[1] - y) / length
    return (x + 3.0 * a, y + 3.0 * b), (to[0] - 1.5 * a, to[1] - 1.5 * b)
