"""Triangles between circles in the unit disc, which may touch, for the finite-element peer.

Nodes lie on the circles, closer together where two come close, and opposite each other where the
gap is narrower than an edge, down to the point of contact. The rest is filled by a quadtree and
joined by Delaunay's rule.
"""

from __future__ import annotations

import cmath
import math
from dataclasses import dataclass
from itertools import combinations

import numpy as np
from numpy.typing import NDArray
from scipy.spatial import Delaunay, cKDTree

# Found by trial on sections with known answers.
SKIN_WEIGHT = 0.2  # of the covers, in the length over which a field between covers changes
EDGE_OVER_GAP = 1.2  # longer edges would cut through a thin layer, unless nodes face each other
MERGED = 0.02  # of the gap one edge away from a contact: circles this close share a node

TURN = 2 * math.pi
Reals = NDArray[np.float64]
Complexes = NDArray[np.complex128]
Integers = NDArray[np.int64]


@dataclass(frozen=True)
class Circle:
    """A boundary in the unit disc: metal at one potential, or the outside of a cover.

    `owner` is the conductor's index, -1 for an earthed wall; `permittivity` is the cover's, `None`
    for metal. `thickness` is the least distance between a cover's outside and its metal, and
    `skin` the same as a thickness of filler.
    """

    centre: complex
    radius: float
    owner: int
    permittivity: float | None = None
    thickness: float = math.inf
    skin: float = 0.0

    def at(self, angle: Reals) -> Complexes:
        return self.centre + self.radius * np.exp(1j * angle)

    def holds(self, points: Complexes) -> NDArray[np.bool_]:
        return abs(points - self.centre) < self.radius


@dataclass(frozen=True)
class Disc:
    """A section as circles in the unit disc; the first circle is the wall."""

    circles: tuple[Circle, ...]
    filler: float

    @property
    def outermost(self) -> dict[int, int]:
        """Each owner's outer circle: a cover comes after its metal."""
        return {c.owner: k for k, c in enumerate(self.circles)}

    def neighbours(self, circle: Circle) -> list[Circle]:
        """The circles with nothing but one material between them and this one."""
        own = [c for c in self.circles if c.owner == circle.owner and c is not circle]
        if own and circle.permittivity is None:
            return own
        others = [self.circles[k] for i, k in self.outermost.items() if i != circle.owner]
        return own + others

    def in_metal(self, points: Complexes) -> NDArray[np.bool_]:
        found = ~self.circles[0].holds(points)
        for c in self.circles[1:]:
            if c.permittivity is None:
                found |= c.holds(points)
        return found


# How close two circles are, and how long the edges on them may be


@dataclass(frozen=True)
class Closeness:
    """Two circles where they are closest: the gap, opening as s²/(2 reach) along the arc s."""

    gap: float
    reach: float
    nested: bool


def closeness(a: Circle, b: Circle) -> Closeness:
    distance = abs(a.centre - b.centre)
    apart = distance - a.radius - b.radius
    inside = abs(a.radius - b.radius) - distance
    nested = inside > apart
    bend = abs(1 / a.radius + (-1 if nested else 1) / b.radius)
    return Closeness(max(apart, inside, 0.0), 1 / max(bend, 1e-9), nested)


def nearest_angle(a: Circle, b: Circle) -> float:
    """Angle on circle a of its point nearest to circle b."""
    toward = b.centre - a.centre
    return cmath.phase(-toward if closeness(a, b).nested and a.radius < b.radius else toward)


def across(a: Circle, b: Circle, angle: float) -> tuple[float, float]:
    """Along the normal to circle a at `angle`: the distance to circle b, and the angle on b."""
    ray, toward = cmath.exp(1j * angle), b.centre - a.centre
    along = (toward * ray.conjugate()).real
    under = along**2 - abs(toward) ** 2 + b.radius**2
    if under < 0:
        return math.inf, 0.0
    reach = along + (1 if closeness(a, b).nested else -1) * math.sqrt(under)
    return reach - a.radius, cmath.phase(a.centre + reach * ray - b.centre)


@dataclass(frozen=True)
class Spacing:
    """Wanted edge lengths: a fraction of the length in which the field changes."""

    disc: Disc
    fraction: float

    def between(self, a: Circle, b: Circle, gap: Reals | float) -> Reals:
        """Edge length where circles a and b are `gap` apart.

        A field between two cylinders varies over sqrt(2 reach gap + gap²), half the distance
        between the two line charges that stand for them. Skins in series ease a narrow gap.
        """
        wide = gap + SKIN_WEIGHT * (a.skin + b.skin)
        return self.fraction * np.sqrt(2 * closeness(a, b).reach * wide + np.square(wide))

    def facing(self, a: Circle, b: Circle, gap: float) -> float:
        """Edge length where nodes of a and b face each other."""
        small = self.fraction * min(a.radius, b.radius)
        thin = EDGE_OVER_GAP * min(a.thickness, b.thickness)
        return min(small, thin, float(self.between(a, b, gap)))

    def along(self, a: Circle, angles: Reals) -> Reals:
        """Edge lengths at points of circle a that face no others."""
        points = a.at(angles)
        found = np.full(len(angles), self.fraction * a.radius)
        for b in self.disc.neighbours(a):
            gap = abs(abs(points - b.centre) - b.radius)
            found = np.minimum(found, EDGE_OVER_GAP * gap)
            if a.owner != b.owner:
                found = np.minimum(found, self.between(a, b, gap))
        return found

    def divided(self, a: Circle, start: float, stop: float) -> Reals:
        """Angles that divide an arc of circle a into edges of the wanted lengths."""
        samples = [np.linspace(start, stop, 65)]
        for b in self.disc.neighbours(a):
            if a.owner != b.owner:
                step = self.between(a, b, closeness(a, b).gap) / a.radius
                graded = step * 2.0 ** np.arange(-1, 5)
                near = nearest_angle(a, b) + np.concatenate([-graded, [0.0], graded])
                near = start + (near - start) % TURN
                samples.append(near[near < stop])
        t = np.unique(np.concatenate(samples))
        density = a.radius / self.along(a, t)
        edges = np.append(0.0, np.cumsum(np.diff(t) * (density[1:] + density[:-1]) / 2))
        n = max(math.ceil(edges[-1] - 0.25), math.ceil((stop - start) / 1.1))
        return np.interp(np.arange(1, n) * edges[-1] / n, edges, t)


# Nodes on the circles


@dataclass(frozen=True)
class Node:
    """A node that faces one on another circle: which pair of circles, how many steps away."""

    angle: float
    point: complex
    pair: int
    step: int


def facing_nodes(spacing: Spacing) -> list[list[Node]]:
    """Nodes opposite each other wherever two circles are closer than an edge is long.

    Only then does a Delaunay mesh keep the circles' edges right down to a point of contact.
    """
    circles = spacing.disc.circles
    tight = []
    for i, j in combinations(spacing.disc.outermost.values(), 2):
        a, b = circles[i], circles[j]
        gap = closeness(a, b).gap
        if gap < spacing.facing(a, b, gap):
            tight.append((i, j) if a.radius <= b.radius else (j, i))
    rings: list[list[Node]] = [[] for _ in circles]
    for pair, (i, j) in enumerate(tight):
        room = (free_arc(circles, i, j, tight), free_arc(circles, j, i, tight))
        for angle, end, step in facing_angles(spacing, circles[i], circles[j], room):
            points = circles[i].at(np.array(angle)), circles[j].at(np.array(end))
            if step == 0:
                points = merged(spacing, circles[i], circles[j], *points)
            rings[i].append(Node(angle % TURN, complex(points[0]), pair, step))
            rings[j].append(Node(end % TURN, complex(points[1]), pair, step))
    return [sorted(ring, key=lambda node: node.angle) for ring in rings]


def free_arc(circles: tuple[Circle, ...], i: int, j: int, tight: list[tuple[int, int]]) -> float:
    """Half the angle on circle i from where it is nearest to circle j to its next such place."""
    here = nearest_angle(circles[i], circles[j])
    others = [p[1] if p[0] == i else p[0] for p in tight if i in p and j not in p]
    turns = [turned(here, nearest_angle(circles[i], circles[k])) for k in others]
    return 0.5 * min(turns, default=0.97 * TURN)


def turned(a: float, b: float) -> float:
    return abs(cmath.phase(cmath.exp(1j * (a - b))))


def facing_angles(
    spacing: Spacing, a: Circle, b: Circle, room: tuple[float, float]
) -> list[tuple[float, float, int]]:
    """Angles on a and b of facing nodes, both ways from where the circles are closest."""
    start = nearest_angle(a, b)
    gap, opposite = across(a, b, start)
    found = [(start, opposite, 0)]
    for side in (1, -1):
        edge, angle, step = spacing.facing(a, b, gap), start, 0
        while True:
            angle += side * edge / a.radius
            step += side
            width, end = across(a, b, angle)
            edge = spacing.facing(a, b, min(width, 1.0))
            if abs(angle - start) > room[0] or turned(end, opposite) > room[1] or width > edge:
                break
            found.append((angle, end, step))
    return found


def merged(
    spacing: Spacing, a: Circle, b: Circle, p: Complexes, q: Complexes
) -> tuple[Complexes, Complexes]:
    """One node in place of two at a contact: elements thinner than rounding cannot be solved."""
    edge = spacing.facing(a, b, 0.0)
    if abs(p - q) < MERGED * edge**2 / (2 * closeness(a, b).reach):
        return (p + q) / 2, (p + q) / 2
    return p, q


def filled(spacing: Spacing, circle: Circle, ring: list[Node]) -> Complexes:
    """All nodes of a circle in order: the facing ones, and arcs divided between them."""
    ring = ring or [Node(0.0, complex(circle.at(np.array(0.0))), -1, 0)]
    found = []
    for node, after in zip(ring, [*ring[1:], ring[0]], strict=True):
        found.append(np.array([node.point]))
        if node.pair != after.pair or abs(node.step - after.step) != 1:
            stop = after.angle + (TURN if after.angle <= node.angle else 0.0)
            found.append(circle.at(spacing.divided(circle, node.angle, stop)))
    return np.concatenate(found)


# Triangles


@dataclass(frozen=True)
class Mesh:
    """Straight triangles, and the edges along each circle as pairs of nodes."""

    nodes: Complexes
    triangles: Integers
    edges: list[Integers]


def triangulated(disc: Disc, fraction: float) -> Mesh:
    """Triangles between the circles' nodes and points that grow sparser away from them."""
    spacing = Spacing(disc, fraction)
    rings = [
        filled(spacing, c, ring)
        for c, ring in zip(disc.circles, facing_nodes(spacing), strict=True)
    ]
    rim, index = np.unique(np.concatenate(rings), return_inverse=True)
    nodes = np.concatenate([rim, background(disc, rings, fraction)])
    triangles = Delaunay(np.column_stack([nodes.real, nodes.imag])).simplices.astype(np.int64)
    on = np.split(index, np.cumsum([len(r) for r in rings])[:-1])
    for circle, ids in zip(disc.circles[1:], on[1:], strict=True):
        if circle.permittivity is None:  # no node is inside metal
            triangles = triangles[~np.isin(triangles, ids).all(axis=1)]
    return Mesh(nodes, triangles, [np.column_stack([i, np.roll(i, -1)]) for i in on])


def background(disc: Disc, rings: list[Complexes], fraction: float) -> Complexes:
    """Centres of a quadtree's cells, finer near finer edges."""
    rim = np.concatenate(rings)
    edges = np.concatenate(
        [np.maximum(abs(r - np.roll(r, 1)), abs(r - np.roll(r, -1))) for r in rings]
    )
    tree = cKDTree(np.column_stack([rim.real, rim.imag]))
    # Off centre, so that symmetrical sections do not put points exactly on their circles.
    cells, side, found = np.array([0.013 + 0.007j]), 2.06, []
    while len(cells):
        distance, nearest = tree.query(np.column_stack([cells.real, cells.imag]))
        coarse = side > 1.15 * (edges[nearest] + fraction * distance)
        found.append(cells[~coarse & (distance > 0.8 * edges[nearest])])
        side /= 2
        quarters = side / 2 * np.array([1 + 1j, 1 - 1j, -1 + 1j, -1 - 1j])
        cells = (cells[coarse][:, None] + quarters).ravel()
    points = np.concatenate(found)
    return points[~disc.in_metal(points)]
