"""Mesh formats: tetrahedra (or triangles, where there are no tetrahedra) with coordinates, read by meshio.

The labels of the corners are the positions of the points in the file.  Cells of lower dimension are left out
with a note; other cells of the top dimension (hexahedra, cells with points between the corners, mixtures) are
refused.  Coordinates are kept as they are, with as many axes as the file has.
"""

from __future__ import annotations

import os
from contextlib import redirect_stderr, redirect_stdout
from io import StringIO
from typing import TYPE_CHECKING

import numpy as np

from ..errors import InputError
from ..triangulation import Coordinates, Triangulation
from .registry import Content, Format, Options
from .source import Source

if TYPE_CHECKING:
    import meshio

__all__ = ["FORMAT"]

# Suffix -> what meshio may call the format, in the order in which they are tried.  Kept here so that a suffix
# is known without importing meshio.
KINDS = {
    ".msh": ("gmsh", "ansys"),
    ".vtk": ("vtk",),
    ".vtu": ("vtu",),
    ".xdmf": ("xdmf",),
    ".xmf": ("xdmf",),
    ".mesh": ("medit",),
    ".meshb": ("medit",),
    ".vol": ("netgen",),
    ".vol.gz": ("netgen",),
    ".node": ("tetgen",),
    ".ele": ("tetgen",),
    ".inp": ("abaqus",),
    ".avs": ("avsucd",),
    ".xml": ("dolfin-xml",),
    ".f3grid": ("flac3d",),
    ".mdpa": ("mdpa",),
    ".med": ("med",),
    ".h5m": ("h5m",),
    ".hmf": ("hmf",),
    ".cgns": ("cgns",),
    ".e": ("exodus",),
    ".exo": ("exodus",),
    ".ex2": ("exodus",),
    ".bdf": ("nastran",),
    ".fem": ("nastran",),
    ".nas": ("nastran",),
    ".post": ("permas",),
    ".dato": ("permas",),
    ".su2": ("su2",),
    ".tec": ("tecplot",),
    ".dat": ("tecplot",),
    ".ugrid": ("ugrid",),
    ".obj": ("obj",),
    ".off": ("off",),
    ".ply": ("ply",),
    ".stl": ("stl",),
    ".wkt": ("wkt",),
}

# what a mesh on standard input may begin with, and the suffix that goes with it
SIGNS = (
    (b"$MeshFormat", ".msh"),
    (b"# vtk DataFile", ".vtk"),
    (b"MeshVersionFormatted", ".mesh"),
    (b"mesh3d", ".vol"),
    (b"ply\n", ".ply"),
    (b"OFF\n", ".off"),
)

SIMPLEX = {2: "triangle", 3: "tetra"}


def sniff(head: bytes) -> bool:
    """Some of the formats begin with a sign of their own."""
    return _sign(head) is not None


def _sign(head: bytes) -> str | None:
    text = head.lstrip()
    if b"<VTKFile" in head[:512]:
        return ".vtu"
    if b"<Xdmf" in head[:512]:
        return ".xdmf"
    if text.startswith(b"solid") and b"facet normal" in text:
        return ".stl"
    return next((suffix for sign, suffix in SIGNS if text.startswith(sign)), None)


def read(source: Source, options: Options) -> tuple[Content, str]:
    """Read a mesh file."""
    suffix = options.suffix or _sign(source.head)
    if suffix is None:
        raise InputError(
            "a mesh on a stream does not say its format",
            hint="name it by its suffix, as in --from vtu, kind='vtu'",
        )
    if source.path is not None:
        mesh, kind = _load(source.path, suffix)
    else:
        import tempfile

        with tempfile.TemporaryDirectory(prefix="dualize-") as folder:
            path = os.path.join(folder, "mesh" + suffix)
            with open(path, "wb") as file:
                file.write(source.data)
            mesh, kind = _load(path, suffix)
    facets = _simplices(mesh, options)
    points = np.asarray(mesh.points, dtype=np.float64)
    if points.ndim != 2 or not np.isfinite(points).all():
        row = int(np.argmin(np.isfinite(points).all(axis=1))) if points.ndim == 2 else 0
        raise InputError("a point has a coordinate that is no finite number", f"point {row}")
    name = {4: "tetrahedra", 3: "triangles"}[facets.shape[1]]
    content = Triangulation.from_facets(
        facets, coordinates=Coordinates(point=points), threads=options.threads
    )
    return content, f"mesh ({kind}), {name}"


def _load(path: str, suffix: str) -> tuple[meshio.Mesh, str]:
    """The mesh, whatever meshio prints or raises on the way."""
    import meshio

    said = StringIO()
    reasons = []
    for kind in KINDS[suffix]:
        try:
            with redirect_stdout(said), redirect_stderr(said):
                return meshio.read(path, file_format=kind), kind
        except (Exception, SystemExit) as error:  # readers of damaged files raise anything, or exit
            reasons.append(_reason(error, said.getvalue()))
        said = StringIO()
    kinds = " or ".join(KINDS[suffix])
    raise InputError(
        f"the mesh cannot be read as {kinds}: {reasons[0]}", hint="is the file whole, and of that kind?"
    )


def _reason(error: BaseException, said: str) -> str:
    if isinstance(error, ModuleNotFoundError):
        return f"it needs the package {error.name}"
    text = "" if isinstance(error, SystemExit) else str(error)
    lines = [line.strip() for line in (text or said).splitlines() if line.strip()]
    return (lines[0] if lines else type(error).__name__)[:160].rstrip(".")


def _simplices(mesh: meshio.Mesh, options: Options) -> np.ndarray:
    """The corners of the top cells, int64, shape (N, 3 or 4)."""
    blocks = [block for block in mesh.cells if len(block.data)]
    top = max((block.dim for block in blocks), default=0)
    if top not in SIMPLEX:
        kinds = ", ".join(sorted({block.type for block in blocks})) or "no cells"
        raise InputError(f"the mesh holds neither tetrahedra nor triangles ({kinds})")
    others = sorted({block.type for block in blocks if block.dim == top and block.type != SIMPLEX[top]})
    if others:
        meant = "tetrahedra" if top == 3 else "triangles"
        raise InputError(
            f"the mesh holds other cells than {meant}: {', '.join(others)}",
            hint="split them into simplices, and save cells without points between the corners",
        )
    left_out: dict[str, int] = {}
    for block in blocks:
        if block.dim < top:
            left_out[block.type] = left_out.get(block.type, 0) + len(block.data)
    for kind, count in left_out.items():
        options.notes(f"ignored {count} {kind} cell{'s' if count != 1 else ''}")
    facets = np.concatenate([np.asarray(block.data) for block in blocks if block.dim == top])
    if facets.dtype.kind not in "iu" or facets.ndim != 2 or facets.shape[1] != top + 1:
        raise InputError(f"the cells have the shape {facets.shape} and the type {facets.dtype}")
    return facets.astype(np.int64)


FORMAT = Format(
    name="mesh",
    suffixes=tuple(KINDS),
    holds="tetrahedra or triangles with coordinates, read only",
    sniff=sniff,
    read=read,
    write=None,
    sure=False,
)
