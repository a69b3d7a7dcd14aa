"""Files are written whole or not at all, and one that exists is not replaced unasked."""

from __future__ import annotations

from pathlib import Path

import pytest

import hystkit as hk
from hystkit.base.files import check_free, write_bytes, write_text


def test_a_file_is_written_and_only_that(tmp_path: Path) -> None:
    path = write_text(tmp_path / "a.txt", "Ω\n")
    assert path.read_bytes() == "Ω\n".encode()
    assert list(tmp_path.iterdir()) == [path]
    with pytest.raises(hk.OutputExistsError, match=r"a\.txt exists already"):
        write_text(path, "other")
    assert write_text(path, "new", overwrite=True).read_text(encoding="utf-8") == "new"


def test_bytes_are_written_as_they_are(tmp_path: Path) -> None:
    data = bytes(range(256)) + b"\r\n"
    path = write_bytes(tmp_path / "a.bin", data)
    assert path.read_bytes() == data
    with pytest.raises(hk.OutputExistsError, match=r"a\.bin exists already"):
        write_bytes(path, b"")
    assert path.read_bytes() == data


def test_a_file_that_only_looks_like_a_leftover_stays(tmp_path: Path) -> None:
    own = tmp_path / "a.txt.partial"
    own.write_text("mine", encoding="utf-8")
    write_text(tmp_path / "a.txt", "text")
    assert own.read_text(encoding="utf-8") == "mine"


@pytest.mark.parametrize(
    ("name", "have"),
    [
        ("missing/a.txt", "there is no folder"),
        ("folder", "is a folder"),
        ("file/a.txt", "is a file"),
        ("n" * 300, "name too long"),
    ],
)
def test_what_cannot_be_written_is_told_and_leaves_nothing(
    tmp_path: Path, name: str, have: str
) -> None:
    (tmp_path / "folder").mkdir()
    (tmp_path / "file").write_text("", encoding="utf-8")
    before = sorted(tmp_path.rglob("*"))
    with pytest.raises(hk.InputError, match="cannot be written") as caught:
        write_text(tmp_path / name, "text", overwrite=True)
    (fault,) = caught.value.faults
    assert have in fault.have.lower()
    assert fault.remedy
    assert sorted(tmp_path.rglob("*")) == before


def test_text_that_has_no_bytes_leaves_the_old_file(tmp_path: Path) -> None:
    path = write_text(tmp_path / "a.txt", "old")
    with pytest.raises(hk.InputError, match="cannot be written"):
        write_text(path, "half a character: \ud800", overwrite=True)
    assert path.read_text(encoding="utf-8") == "old"
    assert list(tmp_path.iterdir()) == [path]


def test_an_interrupt_leaves_nothing_behind(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def interrupted(*_: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr(Path, "replace", interrupted)
    with pytest.raises(KeyboardInterrupt):
        write_text(tmp_path / "a.txt", "text")
    assert list(tmp_path.iterdir()) == []


def test_a_target_is_checked_ahead(tmp_path: Path) -> None:
    (tmp_path / "file").write_text("", encoding="utf-8")
    check_free(tmp_path / "new" / "deeper", "another")
    with pytest.raises(hk.OutputExistsError, match="exists already"):
        check_free(tmp_path / "file", "another")
    check_free(tmp_path / "file", "another", overwrite=True)
    # What can never exist is refused even where everything may be replaced.
    with pytest.raises(hk.InputError, match="cannot be written") as caught:
        check_free(tmp_path / "file" / "new" / "deeper", "another", overwrite=True)
    assert caught.value.faults[0].have == f"{tmp_path / 'file'} is a file"
