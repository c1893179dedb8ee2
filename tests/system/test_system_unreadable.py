"""Files that cannot be read at all: each reason has its own plain sentence."""

from __future__ import annotations

import os
from pathlib import Path

import pytest

from vetter.errors import Fault, InputError
from vetter.system import read_system
from vetter.system import text_files as files


def only_fault(path: Path) -> Fault:
    with pytest.raises(InputError) as caught:
        read_system(path)
    assert caught.value.source == str(path)
    (fault,) = caught.value.faults
    return fault


def test_a_missing_file(tmp_path: Path) -> None:
    assert only_fault(tmp_path / "none.toml").expected == "a file that exists"


def test_a_missing_file_leaves_no_file_behind(tmp_path: Path) -> None:
    only_fault(tmp_path / "none.toml")
    assert list(tmp_path.iterdir()) == []


def test_a_folder(tmp_path: Path) -> None:
    fault = only_fault(tmp_path)
    assert (fault.value, fault.expected) == ("a folder", "an ordinary file")


def test_a_named_pipe_does_not_block(tmp_path: Path) -> None:
    os.mkfifo(tmp_path / "pipe.toml")
    assert only_fault(tmp_path / "pipe.toml").value == "a device or a pipe"


def test_a_file_without_permission(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "closed.toml"
    path.write_text("name = 'x'")

    # The superuser may read everything, so the refusal itself is played.
    def refuse(self: Path) -> bytes:
        raise PermissionError(13, "Permission denied", str(self))

    monkeypatch.setattr(Path, "read_bytes", refuse)
    fault = only_fault(path)
    assert "permission" in fault.expected
    assert "permissions" in fault.mend


@pytest.mark.skipif(os.geteuid() == 0, reason="the superuser may read everything")
def test_a_file_whose_mode_forbids_reading(tmp_path: Path) -> None:
    path = tmp_path / "closed.toml"
    path.write_text("name = 'x'")
    path.chmod(0)
    assert "permission" in only_fault(path).expected


@pytest.mark.parametrize("content", [b"", b" \n\t\r\n"])
def test_an_empty_file(tmp_path: Path, content: bytes) -> None:
    (tmp_path / "empty.toml").write_bytes(content)
    assert only_fault(tmp_path / "empty.toml").value == "empty"


def test_a_file_of_remarks_lacks_everything_required(tmp_path: Path) -> None:
    path = tmp_path / "remarks.toml"
    path.write_text("# to be filled\n")
    with pytest.raises(InputError) as caught:
        read_system(path)
    assert [fault.key for fault in caught.value.faults] == ["name", "photometry", "distance", "orbit"]


def test_a_file_that_is_too_large(tmp_path: Path) -> None:
    path = tmp_path / "large.toml"
    with path.open("wb") as stream:
        stream.truncate(files.LARGEST_BYTES + 1)
    fault = only_fault(path)
    assert (fault.value, fault.expected) == ("too large", "at most 20 MB")


def test_a_file_that_is_not_utf_8_says_in_which_line(tmp_path: Path) -> None:
    path = tmp_path / "latin.toml"
    path.write_bytes('# one\n# two\nname = "Köhler"\n'.encode("latin-1"))
    fault = only_fault(path)
    assert (fault.key, fault.value, fault.expected) == ("line 3", "the byte 0xf6", "UTF-8 text")


def test_utf_16_is_refused(tmp_path: Path) -> None:
    path = tmp_path / "wide.toml"
    path.write_text('name = "x"', encoding="utf-16")
    assert only_fault(path).expected == "UTF-8 text"


@pytest.mark.parametrize(
    ("text", "key", "value"),
    [
        ('name = "x"\nperiod = \n', "line 2, column 10", "'period ='"),
        ('name = "x"\n[orbit\n', "line 2, column 7", "'[orbit'"),
        ('name = "x"\nname = "y"\n', "line 2, column 11", "'name = \"y\"'"),
        ("[sky]\n[sky]\n", "line 2, column 5", "'[sky]'"),
        ("k = 1.2.3\n", "line 1, column 8", "'k = 1.2.3'"),
        ("k = 053\n", "line 1, column 6", "'k = 053'"),
        ('name = "x', "line 1, the end of the file", "'name = \"x'"),
        ("name = x\n", "line 1, column 8", "'name = x'"),
        ("k1 = 53,2\n", "line 1, column 8", "'k1 = 53,2'"),
    ],
)
def test_what_is_not_toml_is_shown_with_its_line_and_column(tmp_path: Path, text: str, key: str, value: str) -> None:
    path = tmp_path / "broken.toml"
    path.write_text(text, encoding="utf-8")
    fault = only_fault(path)
    assert (fault.key, fault.value) == (key, value)
    assert fault.expected.startswith("TOML (")
    assert "KEY = VALUE" in fault.mend


@pytest.mark.parametrize("depth", [500, 5000, 50000])
@pytest.mark.parametrize(("left", "right"), [("[", "]"), ("{a=", "}")])
def test_deep_nesting_is_refused(tmp_path: Path, depth: int, left: str, right: str) -> None:
    path = tmp_path / "deep.toml"
    path.write_text(f"k = {left * depth}1{right * depth}\n", encoding="utf-8")
    with pytest.raises(InputError):
        read_system(path)


def test_deep_nesting_by_dots_is_an_unknown_key(tmp_path: Path) -> None:
    path = tmp_path / "dots.toml"
    path.write_text(f"k{'.k' * 3000} = 1\n", encoding="utf-8")
    with pytest.raises(InputError) as caught:
        read_system(path)
    assert ("k", "a table") in [(fault.key, fault.value) for fault in caught.value.faults]


def test_an_integer_of_thousands_of_digits_is_refused(tmp_path: Path) -> None:
    path = tmp_path / "long.toml"
    path.write_text(f"k = {'9' * 6000}\n", encoding="utf-8")
    assert "ordinary length" in only_fault(path).expected


def test_a_null_character_in_the_name_of_the_file() -> None:
    with pytest.raises(InputError, match="null"):
        read_system("a\0b.toml")
