"""Writing a file so that it appears complete or not at all."""

from __future__ import annotations

import os
from pathlib import Path


def replace_file(path: str | os.PathLike[str], content: bytes) -> None:
    """Put content at path in one move: until all of it is on disk, what was there stays as it was.

    Parameters
    ----------
    path : path
        Where; a file already there keeps its permissions.
    content : bytes
        The whole file.

    Raises
    ------
    OSError
        When the place cannot be written to.
    """
    target = Path(path)
    beside = target.with_name(f".{target.name[:100]}.{os.getpid()}.part")
    try:
        with beside.open("xb") as file:
            file.write(content)
            file.flush()
            os.fsync(file.fileno())
        if target.exists():
            beside.chmod(target.stat().st_mode & 0o777)
        beside.replace(target)
    except BaseException:
        beside.unlink(missing_ok=True)
        raise
