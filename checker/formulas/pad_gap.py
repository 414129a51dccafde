"""Distances between the copper of pads in the plane: rectangles turned by an angle, and the same with round ends.

A layout file gives a pad as two lengths and an angle, seldom its corners. The least copper such a pad can have is the strip with
round ends (a disc where both lengths are equal), the most is the rectangle; a distance between least copper is never less than
the real one, and one between rectangles never more. Plane geometry; no standard is needed.
"""

from __future__ import annotations

import heapq
import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from itertools import count, product

Point = tuple[float, float]
Box = tuple[float, float, float, float]  # least x, least y, greatest x, greatest y
PAIRS = 200_000  # pairs of shapes that are measured for one distance
_LEAF = 6  # shapes of a leaf of the tree


@dataclass(frozen=True, slots=True)
class Shape:
    """Every point no further than `radius` from the convex hull of `corners` (1 point, 2 ends of a strip, 4 corners in order)."""

    corners: tuple[Point, ...]
    radius: float = 0.0

    @property
    def box(self) -> Box:
        """The upright box around it."""
        xs, ys = [x for x, _ in self.corners], [y for _, y in self.corners]
        return min(xs) - self.radius, min(ys) - self.radius, max(xs) + self.radius, max(ys) + self.radius


def rounded(x: float, y: float, width: float, height: float, turned: float = 0.0) -> Shape:
    """The strip with round ends that width and height leave room for, turned anticlockwise by degrees; a disc for a square."""
    radius, reach = min(width, height) / 2, abs(width - height) / 2
    if not reach:
        return Shape(((x, y),), radius)
    cos, sin = _direction(turned if width > height else turned + 90)
    return Shape(((x - reach * cos, y - reach * sin), (x + reach * cos, y + reach * sin)), radius)


def rectangle(x: float, y: float, width: float, height: float, turned: float = 0.0) -> Shape:
    """The rectangle around (x, y), turned anticlockwise by degrees."""
    if not width or not height:
        return rounded(x, y, width, height, turned)
    cos, sin = _direction(turned)
    a, b = width / 2, height / 2
    return Shape(tuple((x + u * cos - v * sin, y + u * sin + v * cos) for u, v in ((-a, -b), (a, -b), (a, b), (-a, b))))


def _direction(turned: float) -> Point:
    """Cosine and sine of an angle in degrees, exact at right angles."""
    if turned % 90 == 0:
        return ((1.0, 0.0), (0.0, 1.0), (-1.0, 0.0), (0.0, -1.0))[int(turned // 90) % 4]
    return math.cos(math.radians(turned)), math.sin(math.radians(turned))


def gap(one: Shape, two: Shape) -> float:
    """The distance between two shapes, in the unit of their corners; 0.0 where they touch or overlap."""
    first, second = _edges(one.corners), _edges(two.corners)
    if _inside(one.corners[0], two.corners) or _inside(two.corners[0], one.corners):
        return 0.0
    least = min(_between(a, b) for a, b in product(first, second))
    return max(0.0, least - one.radius - two.radius)


def _edges(corners: Sequence[Point]) -> list[tuple[Point, Point]]:
    if len(corners) < 3:
        return [(corners[0], corners[-1])]
    return [(corners[at - 1], corners[at]) for at in range(len(corners))]


def _inside(point: Point, corners: Sequence[Point]) -> bool:
    """Whether a point lies in the convex figure whose corners run anticlockwise."""
    return len(corners) > 2 and all(_turn(a, b, point) >= 0 for a, b in _edges(corners))


def _turn(a: Point, b: Point, c: Point) -> float:
    return (b[0] - a[0]) * (c[1] - a[1]) - (b[1] - a[1]) * (c[0] - a[0])


def _between(one: tuple[Point, Point], two: tuple[Point, Point]) -> float:
    """The distance between two segments."""
    (a, b), (c, d) = one, two
    if _turn(a, b, c) * _turn(a, b, d) < 0 and _turn(c, d, a) * _turn(c, d, b) < 0:
        return 0.0
    return min(_to(a, c, d), _to(b, c, d), _to(c, a, b), _to(d, a, b))


def _to(point: Point, a: Point, b: Point) -> float:
    """The distance of a point from a segment."""
    along = (b[0] - a[0], b[1] - a[1])
    square = along[0] * along[0] + along[1] * along[1]
    share = 0.0
    if square:
        share = ((point[0] - a[0]) * along[0] + (point[1] - a[1]) * along[1]) / square
        share = min(1.0, max(0.0, share))
    return math.hypot(point[0] - a[0] - share * along[0], point[1] - a[1] - share * along[1])


@dataclass(frozen=True, slots=True)
class _Tree:
    """Shapes in nested boxes: two halves, or the places of a few shapes."""

    box: Box
    halves: tuple[_Tree, ...]
    places: tuple[int, ...]

    @property
    def size(self) -> float:
        return max(self.box[2] - self.box[0], self.box[3] - self.box[1])


@dataclass(frozen=True, slots=True)
class Field:
    """Shapes in a tree of boxes, made once and searched often."""

    shapes: tuple[Shape, ...]
    tree: _Tree | None

    @classmethod
    def of(cls, shapes: Sequence[Shape]) -> Field:
        return cls(tuple(shapes), _tree(shapes, range(len(shapes))) if shapes else None)


def nearest(
    one: Field, two: Field, counts: Callable[[int, int], bool] = lambda first, second: True
) -> tuple[float, int, int] | None:
    """(distance, place in `one`, place in `two`) of the nearest two shapes; None when no pair counts.

    The nearest pair of boxes is looked into first, so that few pairs of shapes are measured.
    After PAIRS of them (thousands of long, slanting, interleaved shapes) the nearest so far is given: never too small a distance.
    """
    if one.tree is None or two.tree is None:
        return None
    best: tuple[float, int, int] | None = None
    order, left = count(0, -1), PAIRS  # of equals the last one first: straight down to the leaves
    heap = [(_apart(one.tree.box, two.tree.box), next(order), one.tree, two.tree)]
    while heap and left > 0:
        bound, _, a, b = heapq.heappop(heap)
        if best is not None and bound >= best[0]:
            break
        for at, to in product(a.places, b.places):
            left -= 1
            if counts(at, to):
                distance = gap(one.shapes[at], two.shapes[to])
                if best is None or distance < best[0]:
                    best = distance, at, to
        if a.halves and (not b.halves or a.size >= b.size):
            pairs = [(half, b) for half in a.halves]
        else:
            pairs = [(a, half) for half in b.halves]
        for pair in pairs:
            distance = _apart(pair[0].box, pair[1].box)
            if best is None or distance < best[0]:
                heapq.heappush(heap, (distance, next(order), *pair))
    return best


def _tree(shapes: Sequence[Shape], places: Sequence[int]) -> _Tree:
    """Halved at the middle of the longer side until few are left."""
    boxes = [shapes[at].box for at in places]
    box = min(b[0] for b in boxes), min(b[1] for b in boxes), max(b[2] for b in boxes), max(b[3] for b in boxes)
    if len(places) <= _LEAF:
        return _Tree(box, (), tuple(places))
    axis = 0 if box[2] - box[0] >= box[3] - box[1] else 1
    ordered = [places[k] for k in sorted(range(len(places)), key=lambda k: boxes[k][axis] + boxes[k][axis + 2])]
    middle = len(ordered) // 2
    return _Tree(box, (_tree(shapes, ordered[:middle]), _tree(shapes, ordered[middle:])), ())


def _apart(one: Box, two: Box) -> float:
    """The distance between two upright boxes."""
    across = max(one[0] - two[2], two[0] - one[2], 0.0)
    up = max(one[1] - two[3], two[1] - one[3], 0.0)
    return math.hypot(across, up)
