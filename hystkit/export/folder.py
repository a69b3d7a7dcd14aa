"""Everything about a design in one folder: record, numbers, LaTeX, live page and figures."""

from __future__ import annotations

import json
import os
import re
import shutil
import unicodedata
from itertools import count
from pathlib import Path
from typing import TYPE_CHECKING, Any

from hystkit.base.files import check_free, write_text
from hystkit.circuit.design import Design
from hystkit.circuit.record import save
from hystkit.export.fragment import write_tex
from hystkit.export.summary import Summary

if TYPE_CHECKING:
    from hystkit.figures.picture import Picture

#: File name -> what it holds, in the order in which they are listed.
FILES = {
    "design.json": "the design, for hystkit.load",
    "numbers.json": "trip points and values, unrounded",
    "law.tex": "derivation, formula and tables, to \\input in LaTeX",
    "page.html": "live page: sliders, figures, law and tables in any browser",
    "ruler.png": "volt axis with all that must fit together",
    "ruler.svg": "",
    "loop.png": "switching loop",
    "loop.svg": "",
    "schematic.png": "schematic with values",
    "schematic.svg": "",
}
#: What to do where the folder exists.
NEW_FOLDER = "a folder that does not exist yet"
_LONGEST_NAME = 60


def write_folder(design: Design, folder: str | os.PathLike[str]) -> Path:
    """Write everything about a design into a new folder.

    Parameters
    ----------
    design : Design
        What to write down.
    folder : path
        Folder to make; folders above it are made too.

    Returns
    -------
    Path
        The folder. It appears when all its files are complete, or not at all.

    Raises
    ------
    OutputExistsError
        If there is something of that name already.
    InputError
        If one of the folders above it is a file.
    DesignError
        If the design has no trip points.
    """
    target = Path(folder)
    check_free(target, NEW_FOLDER)
    summary = Summary(design)
    target.parent.mkdir(parents=True, exist_ok=True)
    partial = target.with_name(f".{target.name}.{os.getpid()}.partial")
    partial.mkdir()
    try:
        _fill(partial, summary)
        partial.rename(target)
    except BaseException:  # an interrupt leaves nothing behind either
        shutil.rmtree(partial, ignore_errors=True)
        raise
    return target


def free_folder(name: str, parent: Path) -> Path:
    """Give a folder for a design that does not exist yet.

    Parameters
    ----------
    name : str
        Name of the design.
    parent : Path
        Where the folder shall stand.

    Returns
    -------
    Path
        Such as ``hystkit-header-tank``; with ``-2``, ``-3``, ... where there is one already.

    Examples
    --------
    >>> free_folder("Header tank, 2nd", Path("reports")).name
    'hystkit-header-tank-2nd'
    """
    plain = unicodedata.normalize("NFKD", name).encode("ascii", "ignore").decode().lower()
    stem = re.sub(r"[^a-z0-9]+", "-", plain)[:_LONGEST_NAME].strip("-") or "design"
    names = (f"hystkit-{stem}" + (f"-{n}" if n > 1 else "") for n in count(1))
    return next(path for path in map(parent.joinpath, names) if not path.exists())


def _fill(folder: Path, summary: Summary) -> None:
    # Drawing is loaded where something is drawn: LaTeX alone does without it.
    from hystkit.export.page.writer import write_page
    from hystkit.figures.loop import loop as loop_picture
    from hystkit.figures.ruler import ruler
    from hystkit.figures.schematic import schematic
    from hystkit.numeric.loop import loop

    design = summary.design
    save(design, folder / "design.json")
    numbers = json.dumps(summary.record(), indent=2, ensure_ascii=False, allow_nan=False)
    write_text(folder / "numbers.json", numbers + "\n")
    write_tex(design, folder / "law.tex")
    write_page(design, folder / "page.html")
    pictures: dict[str, Picture[Any]] = {
        "ruler": ruler(summary.levels),
        "loop": loop_picture(loop(design)),
        "schematic": schematic(design),
    }
    for name, picture in pictures.items():
        for ending in (".png", ".svg"):
            picture.save(folder / (name + ending))
