"""The main job without a notebook, and a notebook without a kernel, from the command line."""

from __future__ import annotations

import argparse
import io
import os
import sys
from collections.abc import Iterator, Mapping, Sequence
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
  python -m hystkit publish vent.ipynb          a notebook, for a wiki; publish --help

The folder holds design.json (a start for a design of your own), numbers.json,
law.tex, page.html (the live page: sliders and results in any browser), and the
ruler, the switching loop and the schematic as PNG and SVG.
Nothing that exists is replaced. Exit code: 0 done, 2 the input cannot be used."""

_PUBLISH = """\
Execute a notebook and write it down for readers who have neither kernel nor
network: NAME.html, one page that holds everything and has the live page of its
design beside each panel, and NAME.published.ipynb, the notebook with outputs
that need no widgets. The notebook itself is left as it is."""

_PUBLISH_EXAMPLES = """\
examples:
  python -m hystkit publish notebooks/vent.ipynb
  python -m hystkit publish notebooks/vent.ipynb --out wiki --overwrite

Exit code: 0 done, 2 the notebook cannot be used or one of its cells fails."""


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
        given = list(sys.argv[1:] if argv is None else argv)
        job = publish if given[:1] == ["publish"] else evaluate
        for line in job(given[1:] if job is publish else given):
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
    from hystkit.base.files import check_free
    from hystkit.export.cautions import CAUTIONS
    from hystkit.export.folder import FILES, NEW_FOLDER, free_folder, write_folder
    from hystkit.export.summary import Summary
    from hystkit.symbolic.law import derive

    if given.out is not None:
        check_free(given.out, NEW_FOLDER)
    design = _design(given.design)
    summary = Summary(design)
    yield f"{summary}\n"
    yield f"{derive(design).for_design(design)}\n"
    yield from CAUTIONS
    label = design.name or (given.design.stem if given.design else "")
    folder = write_folder(design, given.out or free_folder(label, Path()))
    yield f"\nwritten to {folder}{os.sep}"
    yield from _listed(FILES)


def publish(argv: Sequence[str]) -> Iterator[str]:
    """Execute a notebook and write it down for readers without kernel and network.

    Parameters
    ----------
    argv : sequence of str
        Arguments after "publish".

    Yields
    ------
    str
        What to tell the user, as it becomes known.
    """
    given = _publish_parser().parse_args(argv)
    from hystkit.export.notebook.publish import publish as written_down

    yield f"executing {given.notebook}"
    done = written_down(given.notebook, given.out, timeout=given.timeout, overwrite=given.overwrite)
    yield f"\nwritten to {done.page.parent}{os.sep}"
    panels = {0: "", 1: ", a panel in it with its live page"}
    beside = panels.get(done.panels, f", {done.panels} panels in it with their live pages")
    yield from _listed(
        {
            done.page.name: f"one page that needs nothing else{beside}",
            done.notebook.name: "the notebook, with outputs that need no widgets",
        }
    )
    if done.left_out:
        yield "\nnot in the page, which fetches nothing:"
        yield from (f"  {address}" for address in done.left_out)


def _listed(files: Mapping[str, str]) -> Iterator[str]:
    width = max(map(len, files))
    yield from (f"  {name:<{width}}  {meaning}".rstrip() for name, meaning in files.items())


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


def _publish_parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="python -m hystkit publish",
        description=_PUBLISH,
        epilog=_PUBLISH_EXAMPLES,
        formatter_class=argparse.RawDescriptionHelpFormatter,
        allow_abbrev=False,
    )
    parser.add_argument("notebook", type=Path, metavar="NOTEBOOK", help="a notebook, .ipynb")
    parser.add_argument(
        "--out",
        type=Path,
        metavar="FOLDER",
        help="folder for both files (default: that of the notebook)",
    )
    parser.add_argument(
        "--timeout",
        type=_seconds,
        default=600.0,
        metavar="S",
        help="longest time for one cell, in seconds (default: 600)",
    )
    parser.add_argument("--overwrite", action="store_true", help="replace files that exist")
    return parser


def _seconds(text: str) -> float:
    try:
        value = float(text)
    except ValueError:
        value = 0.0
    if not 0 < value < float("inf"):
        raise argparse.ArgumentTypeError(f"{text!r} is not a time in seconds, such as 120")
    return value


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
