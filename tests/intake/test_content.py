"""Bytes to text: which encoding, and what becomes of a file that is written while it is read."""

from __future__ import annotations

import os
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from tests.intake.folders import adds_up, take_in

from holdsteady.intake.content import load, load_again
from holdsteady.intake.encoding import decode, known_encoding

TEXT = "stamp,v,who\n2025-01-01,1.5,Zoé\n"


@pytest.mark.parametrize(
    ("written", "mark", "name"),
    [
        ("utf-8", "", "utf-8"),
        ("utf-8", "\ufeff", "utf-8"),
        ("utf-16-le", "\ufeff", "utf-16-le"),
        ("utf-16-be", "\ufeff", "utf-16-be"),
        ("utf-16-le", "", "utf-16-le"),
        ("utf-16-be", "", "utf-16-be"),
        ("cp1252", "", "cp1252"),
    ],
)
@pytest.mark.parametrize("times", [1, 40_000], ids=["short", "several pieces"])
def test_the_encoding_is_found(written: str, mark: str, name: str, times: int) -> None:
    text = TEXT * times
    decoded = decode((mark + text).encode(written))
    assert (decoded.encoding, decoded.trouble) == (name, "")
    assert decoded.text.decode().removeprefix("\ufeff") == text


@settings(max_examples=150, deadline=None)
@given(st.text(alphabet="aä öüß,é;èñ\nç1", min_size=1), st.sampled_from(["utf-8", "cp1252"]))
def test_utf_8_is_told_from_cp1252(text: str, written: str) -> None:
    """None of these letters of cp1252 makes a character of UTF-8 with another, or ends one."""
    text = f"v,who\n1,{text}.\n"
    decoded = decode(text.encode(written))
    assert decoded.text.decode() == text
    assert decoded.encoding == ("utf-8" if text.isascii() else written)


def test_a_bad_byte_among_many_good_characters_is_no_other_encoding() -> None:
    decoded = decode("v,who\n1,Zoé\n1,Größe\n".encode() + b"1,\xff\n")
    assert (decoded.encoding, decoded.text.decode()[-4:]) == ("utf-8", "1,\ufffd\n")


@settings(max_examples=100, deadline=None)
@given(st.text(), st.sampled_from(["utf-8", "utf-16-le", "utf-16-be", "shift_jis", "koi8-r", "utf-7"]))
def test_a_prescribed_encoding_is_used(text: str, name: str) -> None:
    data = text.encode(name, "ignore")
    decoded = decode(b"v,who\n".decode().encode(name) + data, name)
    if not decoded.trouble:
        assert decoded.text.decode().removeprefix("\ufeff") == "v,who\n" + data.decode(name)


@pytest.mark.parametrize(
    ("given_name", "kept"),
    [
        ("UTF8", "utf-8"),
        ("utf-8-sig", "utf-8"),
        ("latin-1", "cp1252"),
        ("windows-1252", "cp1252"),
        ("UTF-16LE", "utf-16-le"),
        ("cp1250", "cp1250"),
        ("rot13", None),
        ("base64", None),
        ("no such", None),
        ("", None),
    ],
)
def test_names_of_encodings(given_name: str, kept: str | None) -> None:
    assert known_encoding(given_name) == kept


def test_an_encoding_that_the_bytes_are_not_in_is_trouble() -> None:
    decoded = decode(("v,who\n1,Zoé\n" * 5).encode("cp1252"), "utf-8")
    assert "correct `encoding`" in decoded.trouble
    assert decode(("v,who\n1,Zoé\n" * 5).encode("cp1252"), "cp1252").trouble == ""


class Written:
    """Stands in for a program that writes on while the file is read."""

    def __init__(self, path: Path, *contents: bytes) -> None:
        self.path, self.left = path, list(contents)
        path.write_bytes(self.left.pop(0))

    def stand_in(self, monkeypatch: pytest.MonkeyPatch) -> None:
        """Write the next contents each time that the file was read."""
        read_bytes = Path.read_bytes

        def read_and_write(path: Path) -> bytes:
            data = read_bytes(path)
            if path == self.path and self.left:
                path.write_bytes(self.left.pop(0))
                os.utime(path, ns=(len(self.left) + 1, len(self.left) + 1))
            return data

        monkeypatch.setattr(Path, "read_bytes", read_and_write)


HEAD = b"stamp,v\n2025-01-01,1.5\n"


def test_a_file_that_only_grows_is_used(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    rows = [HEAD + b"2025-01-02,2.5\n" * more for more in range(9)]
    written = Written(tmp_path / "a.csv", *rows)
    written.stand_in(monkeypatch)
    assert load(tmp_path / "a.csv").text == rows[1]
    intake = take_in(tmp_path, {})
    adds_up(intake)
    assert intake.files[0].used >= 1
    assert intake.set_aside == ()


def test_a_file_that_is_written_anew_is_used_once_it_stands_still(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    written = Written(tmp_path / "a.csv", HEAD, b"stamp,v\n2025-01-01,1.25\n")
    written.stand_in(monkeypatch)
    assert load(tmp_path / "a.csv").text == b"stamp,v\n2025-01-01,1.25\n"


def test_a_file_that_never_stands_still_is_one_line(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    written = Written(tmp_path / "a.csv", *(b"stamp,v\n2025-01-01,%d\n" % n for n in range(9, 0, -1)))
    (tmp_path / "b.csv").write_bytes(HEAD)
    written.stand_in(monkeypatch)
    intake = take_in(tmp_path, {})
    (line,) = intake.set_aside
    assert (line.file, line.line) == ("a.csv", None)
    assert "changes while it is read" in line.reason
    assert [(one.file, one.used) for one in intake.files] == [("a.csv", 0), ("b.csv", 1)]


def test_what_was_added_since_is_left_out(tmp_path: Path) -> None:
    path = tmp_path / "a.csv"
    path.write_bytes(HEAD)
    first = load(path)
    path.write_bytes(HEAD + b"2025-01-02,2.5\n")
    again = load_again(path, None, size=first.size, digest=first.digest)
    assert again is not None
    assert again.text == HEAD
    path.write_bytes(HEAD.replace(b"1.5", b"9.5"))
    assert load_again(path, None, size=first.size, digest=first.digest) is None
    path.unlink()
    assert load_again(path, None, size=first.size, digest=first.digest) is None


def test_a_file_that_went_between_two_readings(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Its rows may have to be read again with care when the source is judged; by then it is gone."""
    text = "stamp,v\n03/04/2025 10:00,1.5\n"
    read_bytes = Path.read_bytes
    seen: list[Path] = []

    def once(path: Path) -> bytes:
        if path in seen:
            raise FileNotFoundError(2, os.strerror(2))
        seen.append(path)
        return read_bytes(path)

    monkeypatch.setattr(Path, "read_bytes", once)
    intake = take_in(tmp_path, {"a.csv": text})
    adds_up(intake)
    assert [(one.file, one.line) for one in intake.set_aside] == [("a.csv", None)]
    assert "cannot be read" in intake.set_aside[0].reason
