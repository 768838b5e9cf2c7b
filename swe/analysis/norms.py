"""Normalised global errors of a field against a reference.

    I(a)  = sum_i A_i a_i / sum_i A_i                     area mean over the faces
    l1    = I(|h - r|) / I(|r|)
    l2    = I((h - r)^2)^(1/2) / I(r^2)^(1/2)
    linf  = max |h - r| / max |r|

h field, r reference, A_i face area (m2). For a vector |.| is its length. Source: Williamson, Drake, Hack, Jakob &
Swarztrauber 1992, J. Comput. Phys. 102, 211 (the paper's norms of height and wind).
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np


@dataclass(frozen=True)
class Norms:
    """The three normalised errors, without unit."""

    l1: float
    l2: float
    linf: float


def norms(field: np.ndarray, reference: np.ndarray, area: np.ndarray) -> Norms:
    """Return the normalised errors of a field on faces. Not collective.

    field, reference  (nf,) scalars or (nf, k) vectors, same unit
    area              (nf,) weights, positive
    Raises ValueError on unlike shapes and where the reference vanishes everywhere, because nothing can be normalised by it.
    """
    if np.shape(field) != np.shape(reference) or np.shape(area) != np.shape(field)[:1]:
        raise ValueError(
            f"norms: field {np.shape(field)}, reference {np.shape(reference)}, area {np.shape(area)}; "
            "field and reference must have one shape and area its first length"
        )
    error, size = _length(np.asarray(field) - reference), _length(reference)
    if not np.any(size):
        raise ValueError("norms: the reference is zero on every face; compare absolute errors instead")
    weight = np.asarray(area) / np.sum(area)
    return Norms(
        l1=float(weight @ error / (weight @ size)),
        l2=float(np.sqrt(weight @ error**2 / (weight @ size**2))),
        linf=float(error.max() / size.max()),
    )


def _length(values) -> np.ndarray:
    """Return the size of a scalar or of the vector of each row."""
    values = np.asarray(values, dtype=float)
    return np.abs(values) if values.ndim == 1 else np.linalg.norm(values, axis=1)
