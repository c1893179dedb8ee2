"""Getting the content of a file, with a plain sentence for each way that can fail."""

from __future__ import annotations

import re
import stat
import tomllib
from pathlib import Path
from typing import Final

from vetter.errors import Fault, InputError

LARGEST_BYTES: Final = 20_000_000
"""Larger files are refused: no table of one system's measurements comes near it."""

_PLACE = re.compile(r"^(?P<what>.*) \(at (?:line (?P<line>\d+), column (?P<column>\d+)|end of document)\)$", re.DOTALL)


def read_bytes(path: Path) -> bytes:
    """Return a regular file's content.

    Raises
    ------
    InputError : missing, a directory, not a regular file, not readable, empty, or larger than 20 MB
    """
    try:
        # Looking before opening keeps a named pipe from blocking for ever.
        status = path.stat()
        wanted = stat.S_ISREG(status.st_mode) and status.st_size <= LARGEST_BYTES
        content = path.read_bytes() if wanted else b""
    except FileNotFoundError:
        mend = "Check the name; names inside a system file are relative to it."
        raise InputError(str(path), [Fault("", "missing", "a file that exists", mend)]) from None
    except PermissionError:
        mend = "Check the permissions of the file and of its folder."
        raise InputError(str(path), [Fault("", "not readable", "permission to read it", mend)]) from None
    except (OSError, ValueError) as error:
        # A null character or an overlong name ends here.
        raise InputError(str(path), [Fault("", "", f"a file that can be read ({error})", "Check the name.")]) from None
    if not stat.S_ISREG(status.st_mode):
        what = "a folder" if stat.S_ISDIR(status.st_mode) else "a device or a pipe"
        raise InputError(str(path), [Fault("", what, "an ordinary file", "Name the file itself.")])
    if status.st_size > LARGEST_BYTES:
        limit = f"at most {LARGEST_BYTES // 1_000_000} MB"
        raise InputError(str(path), [Fault("", "too large", limit, "Name the right file, or keep what is needed.")])
    if not content.strip():
        raise InputError(str(path), [Fault("", "empty", "some content", "Check that the file was saved.")])
    return content


def read_text(path: Path) -> str:
    """Return a UTF-8 file's text without its byte-order mark; raises InputError as :func:`read_bytes`, or by line."""
    content = read_bytes(path)
    try:
        return content.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = content.count(b"\n", 0, error.start) + 1
        bad = f"the byte 0x{content[error.start]:02x}"
        fault = Fault(f"line {line}", bad, "UTF-8 text", "Save the file as UTF-8.")
        raise InputError(str(path), [fault]) from None


def read_toml(path: Path) -> dict[str, object]:
    """Return a TOML file's content.

    Raises
    ------
    InputError : unreadable, not UTF-8, or not TOML; the fault then names line and column and quotes the line
    """
    text = read_text(path)
    try:
        return tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise InputError(str(path), [_syntax_fault(str(error), text)]) from None
    except RecursionError:
        mend = "Remove the nested brackets; no key of this file nests more than two deep."
        raise InputError(str(path), [Fault("", "nested too deep", "flat tables", mend)]) from None
    except ValueError as error:
        # The one other thing the parser raises: an integer with more digits than Python will read.
        mend = "Write the number with a decimal point and an exponent."
        raise InputError(str(path), [Fault("", "", f"numbers of ordinary length ({error})", mend)]) from None


def _syntax_fault(message: str, text: str) -> Fault:
    """Return the fault for a message of the TOML parser, with the line it points to."""
    found = _PLACE.match(message)
    what = (found["what"] if found else message).strip()
    lines = text.split("\n")
    if found and found["line"]:
        number = int(found["line"])
        key = f"line {number}, column {found['column']}"
    else:
        number = len(lines)
        key = f"line {number}, the end of the file"
    quoted = lines[number - 1].strip()[:60] if number <= len(lines) else ""
    mend = "Write KEY = VALUE, text in double quotes, tables as [NAME]; each key and table once."
    return Fault(key, repr(quoted) if quoted else "", f"TOML ({what})", mend)
