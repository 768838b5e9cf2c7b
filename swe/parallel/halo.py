"""Exchange of owned values: who needs what was decided in `subdomain`; here it moves.

All subdomains of a rank share one message per neighbouring rank and exchange, in buffers made once with persistent
requests. Subdomains on the same rank copy. Values are moved, never changed, so a result does not depend on how
subdomains are spread over ranks.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from mpi4py import MPI

Pattern = Sequence[tuple[int, np.ndarray]]


class Halo:
    """Exchanges `fields` arrays per subdomain at the indices of a take / give pattern.

    local       subdomains of this rank: {index: position in the lists of arrays}
    take, give  one pattern for each local subdomain, in that order
    rank_of     maps a subdomain to its rank
    """

    def __init__(
        self, comm: MPI.Comm, local: dict[int, int], take: Sequence[Pattern], give: Sequence[Pattern], rank_of, fields: int
    ):
        self.comm, self.fields = comm, fields
        self.messages = 0
        self.bytes_sent = 0
        self._copies = []
        sends: dict[int, list] = {}
        receives: dict[int, list] = {}
        for index, position in sorted(local.items()):
            for source, where in take[position]:
                if source in local:
                    given = dict(give[local[source]])[index]
                    self._copies.append((local[source], given, position, where))
                else:
                    receives.setdefault(rank_of(source), []).append((source, index, position, where))
            for target, where in give[position]:
                if target not in local:
                    sends.setdefault(rank_of(target), []).append((index, target, position, where))
        self._sends = [self._channel(rank, sorted(parts, key=_pair), comm.Send_init) for rank, parts in sorted(sends.items())]
        self._receives = [
            self._channel(rank, sorted(parts, key=_pair), comm.Recv_init) for rank, parts in sorted(receives.items())
        ]
        self._requests = [request for _, _, request in self._receives + self._sends]

    def _channel(self, rank: int, parts: list, init):
        size = sum(where.size for _, _, _, where in parts)
        buffer = np.zeros((self.fields, size))
        places, begin = [], 0
        for _, _, position, where in parts:
            places.append((position, where, slice(begin, begin + where.size)))
            begin += where.size
        return buffer, places, init(buffer, rank, tag=self.fields)

    def exchange(self, *arrays: Sequence[np.ndarray]) -> None:
        """Overwrite what is not owned by the owners' values, in place. Collective.

        arrays: `fields` lists, each with one array per local subdomain.
        """
        for buffer, places, _ in self._sends:
            for position, where, part in places:
                for field, lists in enumerate(arrays):
                    buffer[field, part] = lists[position][where]
        MPI.Prequest.Startall(self._requests)
        for source, given, position, where in self._copies:
            for lists in arrays:
                lists[position][where] = lists[source][given]
        MPI.Request.Waitall(self._requests)
        for buffer, places, _ in self._receives:
            for position, where, part in places:
                for field, lists in enumerate(arrays):
                    lists[position][where] = buffer[field, part]
        self.messages += len(self._sends)
        self.bytes_sent += sum(buffer.nbytes for buffer, _, _ in self._sends)

    def free(self) -> None:
        """Give the persistent requests back. Not collective."""
        for request in self._requests:
            request.Free()
        self._requests = []


def _pair(part) -> tuple[int, int]:
    return part[0], part[1]
