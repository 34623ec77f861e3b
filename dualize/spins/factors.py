"""Where each factor of a sum belongs: at a face, at an edge, at the boundary."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np

from ..errors import InputError
from ..skeleton import Skeleton

__all__ = ["Weights", "face_signs", "weights"]


@dataclass(frozen=True, eq=False)
class Weights:
    """The factors of a sum over SU(2) spins and intertwiners besides the vertex amplitudes.

    A face f contributes ``(-1)**(2 j odd[f]) * (2 j + 1)**face_power[f]``, an edge e with recoupling spin k
    ``(2 k + 1)**edge_power[e]``.

    Attributes
    ----------
    face_power : ndarray of float64, shape (F,)
    odd : ndarray of int8, shape (F,)
    edge_power : ndarray of float64, shape (E,)
    """

    face_power: np.ndarray
    odd: np.ndarray
    edge_power: np.ndarray

    def of_faces(self, spins: np.ndarray) -> np.ndarray:
        """The product of the face factors for twice-spins of all faces, (..., F) -> (...)."""
        rows = np.asarray(spins, dtype=np.int64)
        size = np.prod((rows + 1.0) ** self.face_power, axis=-1)
        result: np.ndarray = size * (1 - 2 * ((rows * self.odd).sum(axis=-1) % 2))
        return result

    def to_dict(self) -> dict[str, Any]:
        """As plain lists."""
        return {
            "face_power": self.face_power.tolist(),
            "odd": self.odd.tolist(),
            "edge_power": self.edge_power.tolist(),
        }


def face_signs(skeleton: Skeleton) -> np.ndarray:
    """How many edges each face runs against, mod 2, whose target is a vertex; int8 (F,).

    This is ``faces/against``, plus 1 where an external face ends with an edge that comes from a node.  With
    it, the amplitude of a region does not depend on the directions of its inner edges and faces.
    """
    last = skeleton["faces/edge"][skeleton["faces/edge_offsets"][1:] - 1]
    inward = (last >= skeleton.counts["edges_internal"]) & (skeleton["edges/source"][last, 0] < 0)
    result: np.ndarray = ((skeleton["faces/against"] + inward) % 2).astype(np.int8)
    return result


def weights(
    skeleton: Skeleton,
    *,
    power: float = 1.0,
    boundary: str = "none",
    norm: str = "orthonormal",
) -> Weights:
    """The factors of a sum in the conventions of the foam.

    Parameters
    ----------
    skeleton : Skeleton
    power : float
        p in the weight (2j+1)**p of a face; 1 for BF theory.
    boundary : str
        ``"none"``: faces and edges at the boundary have no weight, so that one of two regions that are glued
        brings none.  ``"root"``: they have the square root, so that both bring half.
    norm : str
        ``"orthonormal"`` intertwiners have the weight 1 at every edge; ``"symbols"``, products of two 3jm
        symbols, have 2k + 1.

    Raises
    ------
    InputError
        If a word is not known.
    """
    if boundary not in ("none", "root"):
        raise InputError(f"there is no boundary weight {boundary!r}", hint="known are: none, root")
    if norm not in ("orthonormal", "symbols"):
        raise InputError(f"there is no norm {norm!r}", hint="known are: orthonormal, symbols")
    share = 0.5 if boundary == "root" else 0.0
    faces = np.full(len(skeleton["faces/against"]), float(power))
    faces[skeleton.counts["faces_internal"] :] *= share
    edges = np.full(len(skeleton["edges/twist"]), float(norm == "symbols" and skeleton.dimension == 4))
    edges[skeleton.counts["edges_internal"] :] *= share
    return Weights(faces, face_signs(skeleton), edges)
