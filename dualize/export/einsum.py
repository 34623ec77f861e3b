"""The network of vertex tensors as JSON: einsum text, index arrays, an order to contract, signs and weights.

Every vertex of the foam is a tensor with an axis for each slot, every edge an index, and external edges stay
open.  The spins are not in the network: ``wedges`` names the face through each wedge of a vertex, ``faces``
the face at each place of an edge, and ``odd`` and ``direction`` are the signs.
"""

from __future__ import annotations

import json
from collections.abc import Iterator

from ..skeleton import Skeleton
from ..spins.contraction import network, plan_network
from ..spins.factors import face_signs
from ..spins.work import leg_corners

__all__ = ["network_lines"]

SIZE = 2  # intertwiners at every edge for which the order is looked for
ORDERED = 1000  # vertices up to which an order is looked for


def network_lines(skeleton: Skeleton) -> Iterator[bytes]:
    """The document as lines of JSON."""
    net = network(skeleton, SIZE if skeleton.dimension == 4 else 1)
    document = {
        "format": "foam-network",
        "version": 1,
        "dimension": skeleton.dimension,
        "einsum": net.einsum,
        "tensors": [list(t) for t in net.tensors],
        "output": list(net.output),
        "path": None,
        "path_for": None,
        "wedges": skeleton["wedges/face"].tolist(),
        "direction": skeleton["wedges/direction"].tolist(),
        "legs": leg_corners(skeleton).tolist(),
        "faces": skeleton["edges/face"].tolist(),
        "faces_internal": skeleton.counts["faces_internal"],
        "odd": face_signs(skeleton).tolist(),
    }
    if len(net.tensors) <= ORDERED:
        document["path"] = [list(step) for step in plan_network(net).path]
        document["path_for"] = f"{SIZE if skeleton.dimension == 4 else 1} intertwiners at every edge"
    yield (json.dumps(document, ensure_ascii=False) + "\n").encode()
