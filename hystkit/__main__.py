"""The main job without a notebook: ``python -m hystkit`` or ``python -m hystkit DESIGN.json``."""

from __future__ import annotations

import argparse
import io
import os
import sys
from collections.abc import Iterator, Sequence
from pathlib import Path
from typing import TYPE_CHECKING

from hystkit import __version__
from hystkit.base.errors import HystkitError

if TYPE_CHECKING:
    from hystkit.circuit.design import Design

DONE, FAILED, INTERRUPTED = 0, 2, 130

_DESCRIPTION = """\
Derive and evaluate a switching stage with hysteresis: print its trip points, its
width and its formula, and write figures, LaTeX and numbers into a new folder."""

_EXAMPLES = """\
examples:
  python -m hystkit                             the demo design, a header tank
  python -m hystkit vent.json                   a design saved with hystkit.save
  python -m hystkit vent.json --out reports/vent

The folder holds design.json (a start for a design of your own), numbers.json,
law.tex, and the ruler, the switching loop and the schematic as PNG and SVG.
Nothing that exists is replaced. Exit code: 0 done, 2 the input cannot be used."""


def main(argv: Sequence[str] | None = None) -> int:
    """Run one job from the command line.

    Parameters
    ----------
    argv : sequence of str, optional
        Arguments; those of the process when left out.

    Returns
    -------
    int
        Exit code: 0 done, 2 the input cannot be used, 130 interrupted.
    """
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            stream.reconfigure(errors="replace")  # a terminal may not know the sign for ohm
    try:
        for line in evaluate(sys.argv[1:] if argv is None else argv):
            print(line, flush=True)
    except HystkitError as error:
        notes = getattr(error, "__notes__", ())
        print("\n".join([f"hystkit: {error}", *notes]), file=sys.stderr)
        return FAILED
    except BrokenPipeError:
        # The reader has gone; the interpreter must not write to it again when it ends.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return FAILED
    except OSError as error:
        print(f"hystkit: cannot write: {error}", file=sys.stderr)
        return FAILED
    except KeyboardInterrupt:
        print("hystkit: interrupted.", file=sys.stderr)
        return INTERRUPTED
    return DONE


def evaluate(argv: Sequence[str]) -> Iterator[str]:
    """Evaluate a design and write its folder.

    Parameters
    ----------
    argv : sequence of str
        Arguments.

    Yields
    ------
    str
        What to tell the user, as it becomes known.
    """
    given = _parser().parse_args(argv)
    # Loaded after the arguments are read: --help must not wait for it.
    from hystkit.export.cautions import CAUTIONS
    from hystkit.export.folder import FILES, free_folder, write_folder
    from hystkit.export.summary import Summary
    from hystkit.symbolic.law import derive

    design = _design(given.design)
    summary = Summary(design)
    yield f"{summary}\n"
    yield f"{derive(design).for_design(design)}\n"
    yield from CAUTIONS
    label = design.name or (given.design.stem if given.design else "")
    folder = write_folder(design, given.out or free_folder(label, Path()))
    yield f"\nwritten to {folder}{os.sep}"
    width = max(map(len, FILES))
    yield from (f"  {name:<{width}}  {meaning}".rstrip() for name, meaning in FILES.items())


def _design(path: Path | None) -> Design:
    from hystkit.circuit.demo import header_tank
    from hystkit.circuit.record import load

    if path is None:
        return header_tank()
    try:
        return load(path)
    except HystkitError as error:
        if str(path) not in str(error):
            error.add_note(f"  file    {path}")
        raise


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="python -m hystkit",
        description=_DESCRIPTION,
        epilog=_EXAMPLES,
        formatter_class=argparse.RawDescriptionHelpFormatter,
        allow_abbrev=False,
    )
    parser.add_argument(
        "design",
        nargs="?",
        type=Path,
        metavar="DESIGN.json",
        help="a saved design; without it, the demo design",
    )
    parser.add_argument(
        "--out",
        type=Path,
        metavar="FOLDER",
        help="folder to make (default: hystkit- and the name of the design, in this folder)",
    )
    parser.add_argument("--version", action="version", version=f"hystkit {__version__}")
    return parser


if __name__ == "__main__":
    sys.exit(main())
