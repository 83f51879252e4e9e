"""Capacitance of a cross-section by finite elements: an independent peer for tests and benchmarks.

Nothing here is shared with the kit's own method. The equation div(eps grad phi) = 0 is solved by
scikit-fem on quadratic triangles whose edges follow the circles, and the matrix is read from the
stored energy, whose error is the square of the field's.

Open space is closed exactly. In the plane Laplace's equation keeps its form, and energy its value,
under an inversion w = 1/(z - p), which also takes circles to circles. With p below the earthed
plane, the half plane above becomes a disc. With no surround, p is put at the centre of one
conductor: its metal becomes the wall of a disc, and infinity an ordinary point inside where no
charge is, so that the total charge is zero as it must be. A pipe is a disc already. Every section
is thus solved as circles within the unit disc.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from scipy.sparse.linalg import splu
from skfem import Basis, BilinearForm, ElementTriP2, MeshTri, MeshTri2
from skfem.helpers import dot, grad

from circle_mesh import Circle, Complexes, Disc, Integers, Mesh, Reals, triangulated
from unlanded.physics.section import Pipe, Plane, Section

VACUUM_PERMITTIVITY = 8.8541878188e-12  # F/m, CODATA 2022
EDGE_AT_HALF_PERCENT = 0.4  # over the length in which the field changes; found by trial


@BilinearForm
def energy(u, v, w):  # type: ignore[no-untyped-def]
    return w.permittivity * dot(grad(u), grad(v))


def capacitance_by_finite_elements(section: Section, *, accuracy: float) -> Reals:
    """Maxwell capacitance matrix [F/m], shape (n, n), to about `accuracy` (0.005 is 0.5 %).

    The error of quadratic elements goes as the fourth power of the edge, which sets the mesh.
    """
    disc = unit_disc(section)
    mesh = triangulated(disc, EDGE_AT_HALF_PERCENT * (accuracy / 0.005) ** 0.25)
    fem, nodes_of = curved(disc, mesh)
    basis = Basis(fem, ElementTriP2())
    eps = permittivity(disc, mesh)
    stiffness = energy.assemble(
        basis, permittivity=np.broadcast_to(eps[:, None], (len(eps), basis.X.shape[1]))
    ).tocsr()
    potential = np.zeros((basis.N, len(section.conductors)))
    for owner, held in nodes_of.items():
        if owner >= 0:
            potential[held, owner] = 1.0
    free = np.setdiff1d(np.arange(basis.N), np.concatenate(list(nodes_of.values())))
    rows = stiffness[free]
    factors = splu(
        rows[:, free].tocsc(),
        permc_spec="MMD_AT_PLUS_A",
        diag_pivot_thresh=0.0,
        options={"SymmetricMode": True},
    )
    potential[free] = factors.solve(-(rows @ potential))
    return VACUUM_PERMITTIVITY * (potential.T @ (stiffness @ potential))


def unit_disc(section: Section) -> Disc:
    """The section's circles, inverted where it has no pipe, moved and scaled to a unit wall."""
    centres = np.array([complex(c.x, c.y) for c in section.conductors])
    radii = np.array([c.radius for c in section.conductors])
    outers = np.array([c.outer for c in section.conductors])
    surround, pole, owner = section.surround, None, -1
    if isinstance(surround, Pipe):
        wall = complex(surround.x, surround.y), surround.radius
    elif isinstance(surround, Plane):
        height = float(np.mean(centres.imag)) - surround.y
        pole = complex(float(np.mean(centres.real)), surround.y - height)
        wall = -0.5j / height, 0.5 / height
    else:
        owner = int(np.argmax(radii))
        pole, wall = complex(centres[owner]), (0j, 1 / float(radii[owner]))
    metals, covers = (placed(centres, r, pole, wall) for r in (radii, outers))
    circles = [Circle(0j, 1.0, owner)]
    for i, conductor in enumerate(section.conductors):
        metal, cover = Circle(*metals[i], i), Circle(*covers[i], i)
        eps = conductor.cover_permittivity
        if i != owner:
            circles.append(metal)
        if conductor.outer > conductor.radius and eps != section.filler_permittivity:
            layer = abs(metal.radius - cover.radius) - abs(metal.centre - cover.centre)
            skin = layer / max(eps / section.filler_permittivity, 1.0)
            circles.append(replace(cover, permittivity=eps, thickness=layer, skin=skin))
    return Disc(tuple(circles), section.filler_permittivity)


def placed(
    centres: Complexes, radii: Reals, pole: complex | None, wall: tuple[complex, float]
) -> list[tuple[complex, float]]:
    """Centres and radii after the inversion about `pole`, in units of the wall."""
    if pole is not None:
        offset = centres - pole
        power = abs(offset) ** 2 - radii**2
        centres, radii = offset.conj() / power, abs(radii / power)
    moved = (centres - wall[0]) / wall[1]
    return [(complex(z), float(r)) for z, r in zip(moved, radii / wall[1], strict=True)]


def permittivity(disc: Disc, mesh: Mesh) -> Reals:
    """Relative permittivity of every triangle."""
    found = np.full(len(mesh.triangles), disc.filler)
    for circle, edges in zip(disc.circles, mesh.edges, strict=True):
        if circle.permittivity is not None:
            held = circle.holds(mesh.nodes)
            held[edges] = True
            # The cover of the conductor that became the wall lies outside its circle.
            is_wall = circle.owner == disc.circles[0].owner
            found[held[mesh.triangles].all(axis=1) != is_wall] = circle.permittivity
    return found


def curved(disc: Disc, mesh: Mesh) -> tuple[MeshTri2, dict[int, Integers]]:
    """Quadratic triangles with their edges bent onto the circles, and each metal's unknowns."""
    straight = MeshTri(
        np.ascontiguousarray([mesh.nodes.real, mesh.nodes.imag]),
        np.ascontiguousarray(mesh.triangles.T),
    )
    fem = MeshTri2.from_mesh(straight)
    place = fem.doflocs[0] + 1j * fem.doflocs[1]
    codes = edge_codes(straight.facets.T)
    order = np.argsort(codes)
    nodes_of = {}
    for circle, edges in zip(disc.circles, mesh.edges, strict=True):
        wanted = edge_codes(edges)
        facets = order[np.searchsorted(codes, wanted, sorter=order) % len(order)]
        if (codes[facets] != wanted).any():
            raise RuntimeError("the mesh does not follow every circle of the section")
        middles = fem.dofs.facet_dofs[0, facets]
        outward = place[middles] - circle.centre
        place[middles] = circle.centre + circle.radius * outward / abs(outward)
        if circle.permittivity is None:
            nodes_of[circle.owner] = np.unique(np.concatenate([middles, edges.ravel()]))
    return replace(fem, doflocs=np.array([place.real, place.imag])), nodes_of


def edge_codes(edges: Integers) -> Integers:
    """One number for each pair of nodes, whichever comes first."""
    ends = np.sort(edges.astype(np.int64), axis=1)
    return (ends[:, 0] << 32) + ends[:, 1]
