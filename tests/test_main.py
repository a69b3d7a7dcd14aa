"""``python -m hystkit``: the main job from the command line."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path

import pytest

import hystkit as hk
from hystkit import __main__ as command
from hystkit.circuit.demo import header_tank
from hystkit.export.folder import FILES
from tests.export.designs import ladder, stuck
from tests.project.source import ROOT, run_python


def run(*arguments: str | Path, cwd: Path) -> subprocess.CompletedProcess[str]:
    """Run the command in a process of its own."""
    return subprocess.run(
        [sys.executable, "-m", "hystkit", *map(str, arguments)],
        cwd=cwd,
        env={**os.environ, "PYTHONPATH": str(ROOT), "PYTHONUTF8": "1"},
        capture_output=True,
        encoding="utf-8",
        check=False,
    )


@pytest.fixture(scope="module")
def place(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return tmp_path_factory.mktemp("empty")


@pytest.fixture(scope="module")
def first(place: Path) -> subprocess.CompletedProcess[str]:
    """The command without arguments, in an empty folder."""
    return run(cwd=place)


def test_demo_prints_trips_width_measurand_law_and_cautions(
    first: subprocess.CompletedProcess[str],
) -> None:
    assert first.returncode == 0, first.stderr
    words = " ".join(first.stdout.split())
    for told in (
        "upper 2.286 V level 1.405 m",
        "lower 1.562 V level 0.8013 m",
        "width 724.6 mV 0.6038 m",
        "not a protective device",
        "local codes and licensed practice",
    ):
        assert told in words
    assert hk.derive(header_tank()).for_design(header_tank()).to_text() in first.stdout


def test_demo_writes_the_folder_that_it_names(
    first: subprocess.CompletedProcess[str], place: Path
) -> None:
    assert "written to hystkit-header-tank" in first.stdout
    folder = place / "hystkit-header-tank"
    assert sorted(path.name for path in folder.iterdir()) == sorted(FILES)
    assert all(name in first.stdout for name in FILES)
    record = json.loads((folder / "numbers.json").read_text(encoding="utf-8"))
    assert record["trips"]["upper"]["value"] == hk.trip_points(header_tank()).upper


def test_second_run_replaces_nothing(
    first: subprocess.CompletedProcess[str], place: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    assert first.returncode == 0
    before = {path: path.stat().st_mtime_ns for path in place.rglob("*")}
    monkeypatch.chdir(place)
    assert command.main([]) == 0
    assert {path: path.stat().st_mtime_ns for path in before} == before
    assert {path.name for path in place.iterdir()} == {
        "hystkit-header-tank",
        "hystkit-header-tank-2",
    }


def test_saved_design_goes_where_it_is_told_to(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    source = hk.save(ladder(), tmp_path / "ladder.json")
    assert command.main([str(source), "--out", str(tmp_path / "reports" / "ladder")]) == 0
    assert "divided signal" in capsys.readouterr().out
    assert hk.load(tmp_path / "reports" / "ladder" / "design.json") == ladder()


def test_nameless_design_is_called_after_its_file(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    hk.save(ladder(), tmp_path / "ladder.json")
    monkeypatch.chdir(tmp_path)
    assert command.main(["ladder.json"]) == 0
    assert "hystkit-ladder" in capsys.readouterr().out
    assert (tmp_path / "hystkit-ladder" / "law.tex").exists()


def test_output_that_exists_is_refused(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tmp_path / "out").mkdir()
    assert command.main(["--out", str(tmp_path / "out")]) == 2
    told = capsys.readouterr()
    assert "exists already" in told.err
    assert told.out == ""
    assert list((tmp_path / "out").iterdir()) == []


GOOD = {"format": "hystkit design", "version": 1, "supply": 5.0}
STAGE = {"sense": "inverting", "supply": "single", "reference": "divider", "output": "push-pull"}


@pytest.mark.parametrize(
    ("content", "named"),
    [
        ("{", ["not JSON", "line 1"]),
        ("[]", ["not a hystkit design record"]),
        ("[" * 100_000, ["not JSON"]),
        (b"\x89PNG\r\n\x1a\n\xff", ["not JSON"]),
        (json.dumps({**GOOD, "version": 99}), ["newer version", "99"]),
        (json.dumps(GOOD), ["stage is missing", "parts is missing"]),
        (
            json.dumps({**GOOD, "stage": STAGE, "parts": {"R_T": "46k4", "R_X": "4,7k"}}),
            ["4,7k"],
        ),
        (json.dumps({**GOOD, "stage": {**STAGE, "sense": "inverted"}, "parts": {}}), ["inverting"]),
        (json.dumps({**GOOD, "stage": STAGE, "parts": ["R_T"]}), ["parts"]),
        (None, ["cannot be read"]),
    ],
    ids=[
        "cut off",
        "list",
        "nested",
        "binary",
        "newer",
        "incomplete",
        "value",
        "choice",
        "shape",
        "gone",
    ],
)
def test_bad_file_is_named_with_its_fault(
    tmp_path: Path,
    capsys: pytest.CaptureFixture[str],
    content: str | bytes | None,
    named: list[str],
) -> None:
    path = tmp_path / "bad.json"
    if content is not None:
        path.write_bytes(content.encode() if isinstance(content, str) else content)
    assert command.main([str(path), "--out", str(tmp_path / "out")]) == 2
    told = capsys.readouterr()
    assert told.out == ""
    assert "bad.json" in told.err
    for words in named:
        assert words in told.err
    assert not (tmp_path / "out").exists()


def test_bad_file_ends_without_a_traceback(tmp_path: Path) -> None:
    (tmp_path / "bad.json").write_text('{"format": "hystkit design"', encoding="utf-8")
    done = run("bad.json", cwd=tmp_path)
    assert (done.returncode, done.stdout) == (2, "")
    assert done.stderr.startswith("hystkit: bad.json is not JSON text.")
    assert "Traceback" not in done.stderr


def test_design_that_does_not_switch_is_refused(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    source = hk.save(stuck(), tmp_path / "stuck.json")
    assert command.main([str(source), "--out", str(tmp_path / "out")]) == 2
    assert "no hysteresis" in capsys.readouterr().err
    assert not (tmp_path / "out").exists()


def test_folder_that_cannot_be_made_is_told(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    (tmp_path / "file").write_text("", encoding="utf-8")
    assert command.main(["--out", str(tmp_path / "file" / "out")]) == 2
    told = capsys.readouterr()
    assert "cannot be written" in told.err
    assert f"{tmp_path / 'file'} is a file" in told.err
    assert told.out == ""


def test_interrupt_is_quiet(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    def interrupted(*_: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr("hystkit.export.folder.write_folder", interrupted)
    assert command.main(["--out", str(tmp_path / "out")]) == 130
    assert capsys.readouterr().err == "hystkit: interrupted.\n"


@pytest.mark.skipif(os.name != "posix", reason="pipes break this way on POSIX systems")
def test_reader_that_leaves_early_gets_no_traceback(tmp_path: Path) -> None:
    script = f"{sys.executable} -m hystkit | head -n 1"
    done = subprocess.run(
        ["sh", "-c", script],
        cwd=tmp_path,
        env={**os.environ, "PYTHONPATH": str(ROOT)},
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.stdout.startswith("Header tank")
    assert "Traceback" not in done.stderr
    assert "BrokenPipe" not in done.stderr


@pytest.mark.parametrize(
    ("arguments", "code", "words"),
    [
        (["--help"], 0, "python -m hystkit vent.json --out reports/vent"),
        (["--version"], 0, hk.__version__),
        (["--oot"], 2, "--oot"),
        (["one.json", "two.json"], 2, "two.json"),
    ],
)
def test_arguments(
    arguments: list[str], code: int, words: str, capsys: pytest.CaptureFixture[str]
) -> None:
    with pytest.raises(SystemExit) as ended:
        command.main(arguments)
    told = capsys.readouterr()
    assert ended.value.code == code
    assert words in (told.err if code else told.out)


def test_help_does_not_wait_for_the_libraries() -> None:
    code = (
        "import sys\n"
        "from hystkit.__main__ import main\n"
        "try: main(['--help'])\n"
        "except SystemExit: pass\n"
        "print([m for m in ('sympy', 'matplotlib', 'numpy', 'ipywidgets') if m in sys.modules])\n"
    )
    assert run_python(code).splitlines()[-1] == "[]"
