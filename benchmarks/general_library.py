"""The same weak form on the same mesh in the general-purpose library NGSolve (a test extra).

For devices with walls and contacts along the axes, no slip, plain contacts with normal entry, no
field and σ_Q = 0: then both programs do the same work and give the same numbers.
"""

from __future__ import annotations

import time
from dataclasses import dataclass

import netgen.meshing as netgen
import ngsolve as ngs
import numpy as np

from fluidev.flow.weights import weigh
from fluidev.fluid.coefficients import FluidCoefficients
from fluidev.geometry.mesh import DeviceMesh


@dataclass(frozen=True)
class Timed:
    """A conductance matrix (S), how many unknowns it took and the seconds of each stage."""

    conductance: np.ndarray
    unknowns: int
    assemble: float
    factorise: float
    solve: float

    @property
    def total(self) -> float:
        """Seconds from a mesh to the conductance matrix."""
        return self.assemble + self.factorise + self.solve


def same_mesh(mesh: DeviceMesh) -> ngs.Mesh:
    """The triangles of a straight-sided mesh, boundary edges named by their stretch."""
    t = mesh.triangulation
    vertices = np.empty((t.count, 2))
    vertices[t.triangles.ravel()] = t.nodes[:, :3].reshape(-1, 2)
    out = netgen.Mesh(dim=2)
    points = [out.Add(netgen.MeshPoint(netgen.Pnt(float(x), float(y), 0.0))) for x, y in vertices]
    inside = out.AddRegion("fluid", dim=2)
    a, b, c = (t.nodes[:, i] for i in range(3))
    turned = (b - a)[:, 0] * (c - a)[:, 1] - (b - a)[:, 1] * (c - a)[:, 0] < 0
    for triangle, flip in zip(t.triangles, turned, strict=True):
        order = triangle[[0, 2, 1]] if flip else triangle
        out.Add(netgen.Element2D(inside, [points[i] for i in order]))
    regions = [out.AddRegion(f"s{i}", dim=1) for i in range(len(mesh.stretches))]
    for pair, stretch in zip(t.boundary, t.stretch, strict=True):
        out.Add(netgen.Element1D([points[i] for i in pair], index=regions[stretch]))
    return ngs.Mesh(out)


def solve_same(mesh: DeviceMesh, fluid: FluidCoefficients, degree: int) -> Timed:
    """Assembly, one factorisation and N − 1 solves with NGSolve's own sparse Cholesky."""
    device = mesh.device
    w = weigh(fluid, device, mesh.scale)
    there = same_mesh(mesh)
    walls, across, along = [], [], []
    for i, stretch in enumerate(mesh.stretches):
        tangent = stretch.curve.tangent(0.5)
        if stretch.contact is None:
            walls.append(f"s{i}")
        elif abs(tangent[0]) > 0.5:
            across.append(f"s{i}")
        else:
            along.append(f"s{i}")
    begun = time.perf_counter()
    velocity = ngs.VectorH1(
        there,
        order=degree,
        dirichletx="|".join(walls + across),
        dirichlety="|".join(walls + along),
    )
    space = velocity * ngs.H1(there, order=degree - 1)
    (u, phi), (v, psi) = space.TnT()
    n = ngs.specialcf.normal(2)
    strain, test = ngs.Sym(ngs.Grad(u)), ngs.Sym(ngs.Grad(v))
    div = ngs.div(u) * ngs.div(v)
    form = ngs.BilinearForm(space, symmetric=True)
    form += (w.viscous * (2 * ngs.InnerProduct(strain, test) - div) + w.friction * u * v) * ngs.dx
    form += (ngs.grad(phi) * v + ngs.grad(psi) * u) * ngs.dx
    contacts = "|".join(across + along)
    form += -(v.Trace() * n * phi + u.Trace() * n * psi) * ngs.ds(contacts)
    form.Assemble()
    loads = []
    for index in range(len(device.contacts)):
        where = "|".join(f"s{i}" for i in mesh.stretches_of_contact(index))
        load = ngs.LinearForm(-(v.Trace() * n) * ngs.ds(where)).Assemble()
        loads.append(load.vec)
    assembled = time.perf_counter()
    inverse = form.mat.Inverse(space.FreeDofs(), inverse="sparsecholesky")
    factorised = time.perf_counter()
    count = len(loads)
    conductance = np.zeros((count, count))
    state, rest = loads[0].CreateVector(), loads[0].CreateVector()
    for j in range(count - 1):
        state.data = inverse * loads[j]
        rest.data = loads[j] - form.mat * state
        state.data += inverse * rest
        conductance[:, j] = [ngs.InnerProduct(load, state) for load in loads]
    conductance[:, -1] = -conductance[:, :-1].sum(axis=1)
    done = time.perf_counter()
    return Timed(
        conductance / w.unit,
        int(space.FreeDofs().NumSet()),
        assembled - begun,
        factorised - assembled,
        done - factorised,
    )
