"""Files that a command writes where a user says: never over something that is there."""

from __future__ import annotations

from pathlib import Path

from plastic.errors import StoreError


def refuse_existing(path: Path | None, option: str) -> None:
    """Refuse to write where something is already; before the work, so that nothing is lost.

    Parameters
    ----------
    path : Path or None
        None when nothing is to be written.
    option : str
        The option that named it, such as ``--out``.

    Raises
    ------
    StoreError
    """
    if path is None:
        return
    if path.exists():
        raise StoreError(f"{path} is there already; give {option} another name")
    if not path.parent.is_dir():
        raise StoreError(f"{path}: there is no folder {path.parent}; make it first")


def write_new(path: Path, text: str, option: str) -> None:
    """Write a text file that is not there yet; one that appeared meanwhile stays as it is."""
    try:
        with path.open("x", encoding="utf-8") as file:
            file.write(text)
    except FileExistsError:
        raise StoreError(f"{path} is there already; give {option} another name") from None
