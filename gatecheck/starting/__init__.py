"""A first policy and an example record, for a repository that has none."""

from __future__ import annotations

import os
from pathlib import Path

from gatecheck.errors import CannotJudge

_TEMPLATES = Path(__file__).parent
#: What is written, by the place where it goes.
FILES = {
    "gatecheck.yaml": "gatecheck.yaml",
    "results/example.record.json": "example.record.json",
}


def start(folder: Path) -> tuple[str, ...]:
    """Write the first policy and the example record below `folder`; overwrite nothing.

    Returns what was done, a sentence for each file.

    Raises
    ------
    CannotJudge
        `folder` is no folder, or cannot be written.
    """
    if not folder.is_dir():
        raise CannotJudge(f"{str(folder)!a} is not a folder", "name the folder to start in")
    done = tuple(_write(folder / place, place, _TEMPLATES / name) for place, name in FILES.items())
    return (*done, "Next: `gatecheck weigh`, then put the records of your own analyses in place of the example.")


def _write(target: Path, place: str, template: Path) -> str:
    if os.path.lexists(target):
        return f"{place} is there already and was left as it is."
    try:
        target.parent.mkdir(parents=True, exist_ok=True)
        with target.open("xb") as file:
            file.write(template.read_bytes())
    except OSError as error:
        reason = os.strerror(error.errno or 0)
        raise CannotJudge(f"{place} cannot be written ({reason})", "make the folder writable") from None
    return f"{place} was written."
