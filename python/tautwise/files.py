"""Files as the commands take and leave them: folders unfolded, a file written whole or not at all."""

from __future__ import annotations

import os
from collections.abc import Iterable

ENDING = ".taut.toml"


def unfolded(files: Iterable[str]) -> list[str]:
    """Files, and the project files in and below folders, in order of name."""
    from pathlib import Path

    from tautwise.errors import Fault, InputError

    found: list[str] = []
    for file in files:
        if not os.path.isdir(file):
            found.append(file)
            continue
        inside = sorted(str(path) for path in Path(file).rglob(f"*{ENDING}") if path.is_file())
        if not inside:
            raise InputError([Fault(file, None, "", f"no file in this folder ends in {ENDING}")])
        found += inside
    return list(dict.fromkeys(found))


def there_already(file: str) -> str:
    """That a file would be overwritten."""
    return f"{file}: the file is there already; --force overwrites it"


def not_to_be_written(file: str, *, force: bool) -> str:
    """Why a file is not written; empty where nothing speaks against it.

    >>> not_to_be_written("", force=True)
    'a file name is missing; for example line.taut.toml'
    """
    if not file:
        return f"a file name is missing; for example line{ENDING}"
    if not os.path.lexists(file):
        return ""
    if not os.path.isfile(file):
        return f"{file}: this is not a regular file, and stays as it is"
    return "" if force else there_already(file)


def write_whole(file: str, text: str, *, force: bool) -> None:
    """Write a file whole or not at all: to a temporary name beside it, synced, then put in place."""
    import tempfile

    folder = os.path.dirname(file) or "."
    with tempfile.NamedTemporaryFile(
        "w", encoding="utf-8", newline="\n", dir=folder, prefix=".tautwise-", delete=False
    ) as stream:
        try:
            stream.write(text)
            stream.flush()
            os.fsync(stream.fileno())
            os.chmod(stream.name, 0o666 & ~_umask())
            _put_in_place(stream.name, file, force=force)
        except BaseException:
            os.unlink(stream.name)
            raise


def _put_in_place(temporary: str, file: str, *, force: bool) -> None:
    if force:
        os.replace(temporary, file)
        return
    os.link(temporary, file)  # unlike a rename, never over a file that has appeared meanwhile
    os.unlink(temporary)


def _umask() -> int:
    mask = os.umask(0o077)
    os.umask(mask)
    return mask
