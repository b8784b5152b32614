"""Tables on the screen: rich where a person reads them, plain text where a program does."""

from __future__ import annotations

from collections.abc import Iterable

from rich.console import Console
from rich.table import Table
from rich.text import Text

from plastic.report.grid import Grid


def printed(grids: Iterable[Grid], console: Console | None = None) -> None:
    """Print tables, one below the other.

    On a terminal they fit its width; anywhere else they are plain text in full width, so that what
    is piped or kept in a file loses nothing.

    Parameters
    ----------
    grids : iterable of Grid
    console : Console, optional
        By default the standard output.
    """
    console = Console() if console is None else console
    for grid in grids:
        if console.is_terminal:
            console.print(rich_table(grid))
            for note in grid.notes:
                console.print(Text(note, style="dim"))
            console.print()
        else:
            console.file.write(f"{grid.plain()}\n\n")


def rich_table(grid: Grid) -> Table:
    """Return a grid as a rich table, its title above it; square brackets are plain text."""
    table = Table(title=Text(grid.title), title_justify="left", show_header=grid.headed)
    for column in grid.columns:
        table.add_column(Text(column), overflow="fold")
    for row in grid.rows:
        table.add_row(*(Text(cell) for cell in row))
    return table
