"""What became of every row of an export: kept, flagged or rejected; the sum is the file."""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass


@dataclass(frozen=True)
class RejectedRow:
    """A row that did not enter the record."""

    path: str
    """The file."""
    line: int
    """Its line, counted from 1."""
    reason: str
    """Why, in a few words."""


@dataclass(frozen=True, kw_only=True)
class RowLedger:
    """Counts of data rows (header and comment lines are not rows), and each rejected row."""

    rows: int
    """Data rows in the files."""
    kept: int
    """Rows that entered the record unflagged."""
    flagged: int = 0
    """Rows that entered the record with a flag worse than 2, missing values among them."""
    rejected: tuple[RejectedRow, ...] = ()
    """Rows that did not enter it."""

    @property
    def adds_up(self) -> bool:
        """Whether kept, flagged and rejected rows make up all rows."""
        return self.kept + self.flagged + len(self.rejected) == self.rows

    @property
    def reasons(self) -> dict[str, int]:
        """Number of rejected rows by reason."""
        return dict(Counter(row.reason for row in self.rejected))
