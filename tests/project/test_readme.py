"""README.md: the job in one paragraph, one picture, two commands, an example, cautions."""

from __future__ import annotations

import re
import subprocess
import sys

import pytest

from tests.project.readme import TEXT, blocks, commands, paragraphs
from tests.project.source import ROOT

PNG = b"\x89PNG\r\n\x1a\n"


def test_starts_with_the_job_in_one_paragraph() -> None:
    title, job, picture, *_ = paragraphs()
    assert title == "# hystkit"
    assert not re.match(r"[#!>*|-]", job)
    assert 60 <= len(job.split()) <= 160
    assert picture.startswith("![")


def test_picture_exists_and_is_described() -> None:
    (found,) = re.findall(r"!\[([^\]]*)\]\(([^)]*)\)", TEXT)
    description, path = found
    assert len(description.split()) >= 8
    assert (ROOT / path).read_bytes().startswith(PNG)


def test_first_command_runs_the_main_job_from_nothing() -> None:
    first = commands()[0]
    assert "-m venv" in first
    assert "pip install ." in first
    assert first.endswith("-m hystkit")


def test_second_command_passes_the_tests_from_nothing() -> None:
    second = commands()[1]
    assert "-m venv" in second
    assert "pip install" in second
    assert "[test]" in second
    assert second.endswith("-m pytest")


def test_example_is_short_and_prints_what_the_file_says(tmp_path: object) -> None:
    example = blocks("python")[0]
    assert len(example.splitlines()) <= 10
    command = [sys.executable, "-c", f"import sys; sys.path.insert(0, {str(ROOT)!r})\n{example}"]
    done = subprocess.run(command, cwd=str(tmp_path), capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    assert done.stdout.split() == blocks("text")[0].split()


@pytest.mark.parametrize(
    "words",
    [
        "not a protective device",
        "independent limiter",
        "isolation",
        "creepage",
        "EMC",
        "surge",
        "local codes",
        "licensed",
    ],
)
def test_caution_is_there(words: str) -> None:
    assert words.lower() in " ".join(TEXT.split()).lower()


@pytest.mark.parametrize("path", re.findall(r"`((?:notebooks|tests|hystkit)/[^`\s]+)`", TEXT))
def test_named_files_exist(path: str) -> None:
    assert (ROOT / path).exists()
