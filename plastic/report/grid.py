"""A table before it is printed: the same rows as plain text, as a rich table or as CSV."""

from __future__ import annotations

import csv
import io
from collections.abc import Sequence
from dataclasses import dataclass, replace

#: signs that mark a cell of a table, each explained in a note under it
EXTRAPOLATED = "†"
ILLUSTRATIVE = "‡"


@dataclass(frozen=True)
class Grid:
    """A titled table of text.

    Attributes
    ----------
    title : str
    columns : sequence of str
    rows : sequence of sequences of str
        As many entries as there are columns.
    notes : sequence of str
        Sentences that stand under the table.
    """

    title: str
    columns: Sequence[str]
    rows: Sequence[Sequence[str]]
    notes: Sequence[str] = ()

    def __post_init__(self) -> None:
        for row in self.rows:
            if len(row) != len(self.columns):
                raise ValueError(
                    f"{self.title}: {len(row)} entries for {len(self.columns)} columns"
                )

    @property
    def headed(self) -> bool:
        """Whether the columns have names."""
        return any(self.columns)

    def plain(self) -> str:
        """Return aligned text without colours or line drawing; no line is ever wrapped."""
        table = [list(self.columns), *map(list, self.rows)]
        widths = [max(len(row[k]) for row in table) for k in range(len(self.columns))]
        lines = ["  ".join(c.ljust(w) for c, w in zip(row, widths, strict=True)) for row in table]
        lines.insert(1, "  ".join("-" * w for w in widths))
        lines = lines if self.headed else lines[2:]
        text = [line.rstrip() for line in lines]
        return "\n".join([*([self.title] if self.title else []), *text, *self.notes])

    def shortened(self, most: int, kept: str) -> Grid:
        """Return the table with its first and last rows only, and how many are left out.

        Parameters
        ----------
        most : int
            Rows that are shown; a table of no more stays as it is.
        kept : str
            Where the whole table is, said under it.
        """
        if len(self.rows) <= most:
            return self
        half = most // 2
        gap = [f"... {len(self.rows) - 2 * half} more", *[""] * (len(self.columns) - 1)]
        rows = [*self.rows[:half], gap, *self.rows[-half:]]
        return replace(self, rows=rows, notes=[*self.notes, kept])

    def csv(self) -> str:
        """Return the table as comma-separated text, without title and notes."""
        out = io.StringIO()
        writer = csv.writer(out, lineterminator="\n")
        writer.writerow(self.columns)
        writer.writerows(self.rows)
        return out.getvalue()
