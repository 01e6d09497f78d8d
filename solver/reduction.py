"""From the matrix of all conductors to the one that a case asks for: ties and floating conductors."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from nightcap.geometry.curves import Floats
from nightcap.geometry.layout import Layout
from nightcap.solver.bracket import Bracket


@dataclass(frozen=True, eq=False)
class Reduction:
    """Ties conductors together, then lets some float."""

    full_names: tuple[str, ...]
    """Conductors but the reference, in layout order."""
    names: tuple[str, ...]
    """Those that remain; a group of tied ones bears its first member's name."""
    tie: Floats
    """(N, M) one column per group: 1 for its members. Conductors tied to the reference have an empty row."""
    floating: tuple[int, ...]
    """Groups, out of M, at zero charge."""

    @classmethod
    def of(cls, layout: Layout, floating: Sequence[str], ties: Sequence[Sequence[str]]) -> Reduction:
        """The reduction of a layout's matrix, its conductors given by name."""
        reference = layout.conductors[layout.reference]
        full = tuple(name for name in layout.conductors if name != reference)
        head = {name: group[0] for group in ties for name in group}
        grounded = {name for group in ties if reference in group for name in group}
        groups = list(dict.fromkeys(head.get(name, name) for name in full if name not in grounded))
        tie = np.zeros((len(full), len(groups)))
        for row, name in enumerate(full):
            if name not in grounded:
                tie[row, groups.index(head.get(name, name))] = 1.0
        afloat = tuple(k for k, name in enumerate(groups) if name in floating)
        names = tuple(name for k, name in enumerate(groups) if k not in afloat)
        return cls(full, names, tie, afloat)

    def potentials(self, full: Floats) -> Floats:
        """(N, K) the potentials of all conductors for one volt on each that remains, from their matrix (N, N)."""
        C = self.tie.T @ full @ self.tie
        kept = np.setdiff1d(np.arange(len(C)), self.floating)
        groups = np.zeros((len(C), len(kept)))
        groups[kept] = np.eye(len(kept))
        if self.floating:  # without charge
            afloat = np.array(self.floating)
            groups[afloat] = -np.linalg.solve(C[np.ix_(afloat, afloat)], C[np.ix_(afloat, kept)])
        return np.asarray(self.tie @ groups)

    def apply(self, full: Bracket) -> Bracket:
        """The reduced bracket."""
        return full.congruent(self.tie).eliminate(self.floating)
