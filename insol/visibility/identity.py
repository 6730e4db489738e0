"""What stored answers belong to: fingerprints of everything that a bit of them depends on."""

from __future__ import annotations

import hashlib
import json
from dataclasses import asdict, dataclass, fields
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from insol.scene.model import Scene
from insol.study.description import Site
from insol.visibility.receptors import Receptors

FORM = 1
"""Of the stored arrays; raised when their meaning changes."""

PLAIN_WORDS = {
    "geometry": "the models' geometry",
    "receptors": "the faces that are measured",
    "site": "the site",
    "casting": "the engine",
    "form": "the form of the stored answers",
}


@dataclass(frozen=True)
class Identity:
    """Equal identities: the stored answers serve."""

    geometry: str
    receptors: str
    site: str
    casting: str
    form: int = FORM

    def differences(self, other: Identity) -> list[str]:
        """What is different about another one, in plain words."""
        return [
            PLAIN_WORDS[field.name] for field in fields(self) if getattr(self, field.name) != getattr(other, field.name)
        ]


def identity_of(scene: Scene, receptors: Receptors, site: Site, engine: str) -> Identity:
    """The identity of the answers that a run is about to ask for."""
    place = (site.latitude, site.longitude, site.elevation_m, site.north_deg)
    return Identity(
        geometry=fingerprint(scene.origin, scene.vertices, scene.triangles),
        receptors=fingerprint(receptors.origins, receptors.normals, receptors.orientation),
        site=fingerprint(np.array(place, dtype=np.float64)),
        casting=engine,
    )


def fingerprint(*arrays: NDArray) -> str:
    """SHA-256 over the arrays' bytes, with their shapes between them."""
    digest = hashlib.sha256()
    for array in arrays:
        digest.update(f"{array.dtype.str}{array.shape}".encode())
        digest.update(np.ascontiguousarray(array).data)
    return digest.hexdigest()


def read_identity(folder: Path) -> Identity | None:
    """The identity of a mask folder, None where there is none or an unreadable one."""
    try:
        return Identity(**json.loads((folder / "identity.json").read_text(encoding="utf-8")))
    except (OSError, ValueError, TypeError):
        return None


def identity_content(identity: Identity) -> dict[str, object]:
    """What stands in identity.json."""
    return asdict(identity)
