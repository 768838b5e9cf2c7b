"""Refilling sparse matrices whose entries are linear in known vectors, without rebuilding their pattern.

A product C = A B with fixed B has the entries C_ij = sum_k A_ik B_kj: linear in the data of A. So the data of a sum of such
products, with several A whose data z change and several fixed B, are

    data = P z

with one constant sparse P (a constant part is a segment of z that holds a one). P is built once; each refill is then one
sparse product.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from scipy import sparse

from swe.operators.sparse import compressed


@dataclass(frozen=True, eq=False)
class Places:
    """Row and column (n,) of each stored entry of a CSR array with sorted columns, in the order of its data."""

    rows: np.ndarray
    columns: np.ndarray
    shape: tuple[int, int]

    @classmethod
    def of(cls, matrix: sparse.csr_array) -> "Places":
        """Return the places of `matrix`. Not collective."""
        rows = np.repeat(np.arange(matrix.shape[0]), np.diff(matrix.indptr))
        return cls(rows, matrix.indices.astype(np.int64), matrix.shape)

    @classmethod
    def union(cls, shape: tuple[int, int], *parts: tuple[np.ndarray, np.ndarray]) -> "Places":
        """Return the places that hold every (rows, columns) of `parts`. Not collective."""
        keys = np.unique(np.concatenate([np.asarray(rows, np.int64) * shape[1] + columns for rows, columns in parts]))
        return cls(keys // shape[1], keys % shape[1], shape)

    @property
    def size(self) -> int:
        return self.rows.size

    def find(self, rows: np.ndarray, columns: np.ndarray) -> np.ndarray:
        """Return the index in the data of each (row, column), all of which must be there. Not collective."""
        keys = self.rows * self.shape[1] + self.columns
        wanted = np.asarray(rows, np.int64) * self.shape[1] + columns
        index = np.searchsorted(keys, wanted)
        if np.any(index == keys.size) or np.any(keys[index] != wanted):
            raise ValueError("a sparse pattern has no place for one of the entries asked for")
        return index


def terms(a: Places, b: sparse.csr_array) -> tuple[np.ndarray, np.ndarray, np.ndarray, np.ndarray]:
    """Return (row, column, index in the data of A, entry of B) of every term of the product A B. Not collective."""
    counts = np.diff(b.indptr)[a.columns]
    source = np.repeat(np.arange(a.size), counts)
    within = np.arange(source.size) - np.repeat(np.cumsum(counts) - counts, counts)
    entry = b.indptr[a.columns][source] + within
    return a.rows[source], b.indices[entry].astype(np.int64), source, b.data[entry]


@dataclass(frozen=True, eq=False)
class Refill:
    """A CSR pattern with the map P (entries, length of z), and z in named segments."""

    places: Places
    indptr: np.ndarray
    indices: np.ndarray
    map: sparse.csr_array
    z: np.ndarray
    segment: dict[str, np.ndarray]

    def matrix(self) -> sparse.csr_array:
        """Return the matrix for the present content of the segments (views of z, to be filled in place). Not collective."""
        return sparse.csr_array((self.map @ self.z, self.indices, self.indptr), shape=self.places.shape)


class Assembly:
    """Collects the terms of a matrix that is linear in named vectors of given lengths."""

    def __init__(self, shape: tuple[int, int], lengths: dict[str, int]):
        self._shape, self._lengths = shape, lengths
        ends = np.cumsum([0, *lengths.values()])
        self._offset = dict(zip(lengths, ends[:-1], strict=True))
        self._total = int(ends[-1])
        self._parts: list[tuple[np.ndarray, ...]] = []

    def add(self, rows, columns, name: str, index, value) -> None:
        """Add value * z[name][index] at (rows, columns), which must be inside the shape or are dropped. Not collective."""
        rows, columns, index, value = np.broadcast_arrays(rows, columns, index, np.asarray(value, dtype=float))
        use = (rows < self._shape[0]) & (columns < self._shape[1])
        self._parts.append(tuple(part[use] for part in (rows, columns, index + self._offset[name], value)))

    def finish(self) -> Refill:
        """Return the pattern and the map; all of z is zero. Not collective."""
        rows, columns, z, value = (np.concatenate(part) for part in zip(*self._parts, strict=True))
        keys, place = np.unique(rows.astype(np.int64) * self._shape[1] + columns, return_inverse=True)
        places = Places(keys // self._shape[1], keys % self._shape[1], self._shape)
        linear = compressed(place, z, value, (keys.size, self._total))
        indptr = np.searchsorted(places.rows, np.arange(self._shape[0] + 1)).astype(np.int32)
        memory = np.zeros(self._total)
        segment = {name: memory[start : start + self._lengths[name]] for name, start in self._offset.items()}
        return Refill(places, indptr, places.columns.astype(np.int32), linear, memory, segment)
