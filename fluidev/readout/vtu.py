"""A flow as a .vtu file for ParaView and the like."""

from __future__ import annotations

from pathlib import Path

import numpy as np
from skfem.assembly import Dofs

from fluidev.geometry.lagrange import LagrangeTriangle
from fluidev.readout.fields import Drive, fields_at
from fluidev.readout.places import Places
from fluidev.readout.provenance import Provenance, put_in_place
from fluidev.readout.surface import anticlockwise


def write_vtu(drive: Drive, target: Path, provenance: Provenance) -> None:
    """Write potential, current density and dissipation of a drive on quadratic triangles, z = 0.

    Each triangle of the mesh is cut into quadratic ones whose nodes are at least the velocity
    nodes, so that nothing of the solution is lost. What jumps between triangles is averaged at
    their common nodes. Units stand in the names; the provenance is a comment in the file.
    """
    import meshio

    order = 2 * max(1, -(-drive.solution.blocks.space.degree // 2))
    element = LagrangeTriangle(order)
    dofs = Dofs(drive.shape.mesh.skfem, element).element_dofs
    places = Places(
        np.tile(np.arange(drive.shape.count), len(dofs)),
        np.repeat(element.doflocs.T, drive.shape.count, axis=1),
    )
    number = dofs.ravel()
    count = np.bincount(number)

    def mean(values: np.ndarray) -> np.ndarray:
        return np.bincount(number, values) / count

    fields = fields_at(drive, places)
    position = np.stack([mean(c) for c in drive.shape.metres(places)] + [np.zeros(len(count))], 1)
    current = np.stack([mean(c) for c in fields.current] + [np.zeros(len(count))], 1)
    heat = {"viscous": fields.viscous, "friction": fields.friction, "intrinsic": fields.relative}
    data = {
        "potential (V)": mean(fields.potential),
        "current density (A/m)": current,
        "dissipation (W/m^2)": mean(fields.dissipation),
        **{f"{name} dissipation (W/m^2)": mean(value) for name, value in heat.items()},
    }
    cells = dofs[_quadratic_pieces(order)].transpose(2, 0, 1)
    cells = anticlockwise(cells, drive.shape.turned_over).reshape(-1, 6)
    with put_in_place(target) as rough:
        meshio.write(
            rough, meshio.Mesh(position, [("triangle6", cells)], point_data=data), file_format="vtu"
        )
        _add_comment(rough, provenance)


def _quadratic_pieces(order: int) -> np.ndarray:
    """Six-node triangles (n, 6), anticlockwise, between the nodes of a triangle of even order."""
    number = {(j, k): n for n, (_, j, k) in enumerate(LagrangeTriangle(order).index.tolist())}
    found = []
    for j in range(0, order, 2):
        for k in range(0, order - j, 2):
            corners = [((j, k), (j + 2, k), (j, k + 2))]
            if j + k < order - 2:
                corners.append(((j + 2, k), (j + 2, k + 2), (j, k + 2)))
            for a, b, c in corners:
                middles = [
                    ((p[0] + q[0]) // 2, (p[1] + q[1]) // 2) for p, q in ((a, b), (b, c), (c, a))
                ]
                found.append([number[node] for node in (a, b, c, *middles)])
    return np.array(found)


def _add_comment(file: Path, provenance: Provenance) -> None:
    """The provenance as an XML comment after the first line of the file."""
    data = file.read_bytes()
    first, end, rest = data.partition(b"\n")
    said = (provenance.title, provenance.line, provenance.case_hash, provenance.warning)
    words = "  ".join(said).replace("--", "- -")
    file.write_bytes(first + end + f"<!-- {words.strip()} -->\n".encode() + rest)
