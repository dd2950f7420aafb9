"""Files and folders of one's own: read with limits, written whole or not at all, for their owner alone."""

from __future__ import annotations

import contextlib
import json
import math
import os
import stat
import tempfile
import tomllib
from collections.abc import Mapping
from pathlib import Path
from typing import Any

from gaugeside.errors import Refusal
from gaugeside.text import plain_text

LARGEST_FILE = 1_000_000  # [bytes]; a full form is a few thousand
DEEPEST_NESTING = 20
LONGEST_NAME = 60  # [characters]
LONGEST_FAULT = 200  # [characters]
MOST_DOTS = 40  # in one line of a TOML file
KEPT_ASIDE = 9  # damaged files kept side by side before the oldest name is used again


def whole_path(path: str | Path) -> Path:
    """Return a path from the root; Refusal where the home or the folder it starts from is not known."""
    expanded = os.path.expanduser(path)
    if expanded.startswith("~"):
        raise Refusal(
            f"No home folder is known for {plain_text(expanded.split(os.sep)[0], LONGEST_NAME)}.",
            "Write the whole path, or ./ before a name that starts with ~.",
        )
    try:
        return Path(os.path.abspath(expanded))
    except OSError as fault:
        raise Refusal(
            "The folder the program was started in is gone.", "Change to another one, or write the whole path."
        ) from fault


def read_json_file(path: Path) -> tuple[dict[str, Any], list[str]]:
    """Return the JSON object in `path`, texts made plain, and one sentence for each fault; never raises.

    An absent file is an empty object without a fault.
    """
    try:
        return _object_in(path), []
    except FileNotFoundError:
        return {}, []
    except OSError as fault:
        return {}, [f"{path.name} cannot be read ({reason(fault)}); it is not used and left as it is."]
    except ValueError as fault:
        return {}, [f"{path.name} is damaged ({fault}) and not used; {next_save(path)}."]


def folder_fault(folder: Path) -> str:
    """Return one sentence where nothing in `folder` can be read; an absent folder is no fault."""
    try:
        os.scandir(folder).close()
    except FileNotFoundError:
        return ""
    except (OSError, ValueError) as fault:
        return (
            f"The program's folder cannot be read ({reason(fault)}): it starts without settings and forms. "
            "F7 shows where it is."
        )
    return ""


def stands_there(path: Path) -> bool | None:
    """Return whether there is a file that can be read, damaged or not; None where that cannot be told."""
    try:
        _object_in(path)
    except FileNotFoundError:
        return False
    except OSError:
        return None
    except ValueError:
        return True
    return True


def standing_object(path: Path) -> dict[str, Any] | None:
    """Return what stands in a file that is about to be replaced; None where it is damaged.

    Raises Refusal where it cannot be read: it may be sound, and is left as it is.
    """
    try:
        return _object_in(path)
    except FileNotFoundError:
        return {}
    except OSError as fault:
        raise _not_written(path, fault) from fault
    except ValueError:
        return None


def _object_in(path: Path) -> dict[str, Any]:
    """Return the JSON object in `path`; OSError where it cannot be read, ValueError with words where it is damaged."""
    if not stat.S_ISREG(path.stat().st_mode):
        raise OSError("not a file")
    with path.open("rb") as file:
        content = file.read(LARGEST_FILE + 1)
    if len(content) > LARGEST_FILE:
        raise ValueError(f"larger than {LARGEST_FILE} bytes")
    try:
        found = json.loads(content.decode("utf-8-sig"), parse_constant=_finite, parse_float=_finite)
    except (ValueError, RecursionError) as fault:
        raise ValueError("not readable as JSON") from fault
    if not isinstance(found, dict):
        raise ValueError("not a JSON object")
    if not _is_shallow(found):
        raise ValueError(f"nested deeper than {DEEPEST_NESTING} levels")
    plain: dict[str, Any] = _made_plain(found)
    return plain


def next_save(path: Path) -> str:
    return f"the next save keeps it as {path.name}.unreadable"


def read_toml_file(path: Path, largest: int) -> dict[str, Any]:
    """Return the tables in `path`, none where there is no file.

    largest: size of the file [bytes].

    Raises OSError when it cannot be read and ValueError, with a sentence, when it is not readable as TOML.
    """
    try:
        if not stat.S_ISREG(path.stat().st_mode):
            raise ValueError("it is not a file")
        with path.open("rb") as file:
            content = file.read(largest + 1)
    except FileNotFoundError:
        return {}
    if len(content) > largest:
        raise ValueError(f"it is larger than {largest // 1000} kB")
    try:
        return parse_toml(content.decode("utf-8-sig"))
    except UnicodeDecodeError as fault:
        raise ValueError("it is not UTF-8 text") from fault


def parse_toml(text: str) -> dict[str, Any]:
    """Return the tables in a TOML text; raises ValueError, with a sentence, when it is not readable as TOML."""
    # The library's memory grows with the square of the parts of a dotted key.
    if any(line.count(".") > MOST_DOTS for line in text.split("\n")):
        raise ValueError(f"a line of it has more than {MOST_DOTS} dots")
    try:
        return tomllib.loads(text)
    except RecursionError as fault:
        raise ValueError("it is nested too deeply") from fault
    except ValueError as fault:
        raise ValueError(f"it is not readable as TOML: {plain_text(str(fault), LONGEST_FAULT)}") from fault


def write_json_file(path: Path, content: Mapping[str, Any], keep_aside: bool) -> None:
    """Write `content` as JSON to `path`, whole or not at all, readable by its owner alone.

    keep_aside: the file that is there gets the name NAME.unreadable first.

    Raises Refusal when the file cannot be written; the file that was there is then untouched.
    """
    try:
        text = json.dumps(content, ensure_ascii=False, indent=1, allow_nan=False)
        if len(text) > LARGEST_FILE // 2:
            # The blanks alone could make it too large to be read again.
            text = json.dumps(content, ensure_ascii=False, separators=(",", ":"), allow_nan=False)
    except (ValueError, RecursionError) as fault:
        raise Refusal(f"{path.name} cannot hold what was to be kept: {fault}.") from fault
    temporary = ""
    try:
        _make_private_folder(path.parent)
        handle, temporary = tempfile.mkstemp(prefix=f".{path.name}.", dir=path.parent)
        with os.fdopen(handle, "wb") as file:
            # A lone surrogate becomes its JSON escape, which reads back as the same text.
            file.write(text.encode("utf-8", "backslashreplace") + b"\n")
            file.flush()
            os.fsync(file.fileno())
        if keep_aside and path.exists():
            os.replace(path, _name_aside(path))
        os.replace(temporary, path)
    except OSError as fault:
        if temporary:
            with contextlib.suppress(OSError):
                os.unlink(temporary)
        raise _not_written(path, fault) from fault
    sync_folder(path.parent)


def make_private_folder(folder: Path) -> None:
    """Create `folder`, and each one above it that is missing, for its owner alone; those that exist stay as they are.

    Raises Refusal when it cannot be created or no home folder is known.
    """
    try:
        _make_private_folder(folder)
    except Refusal:
        raise
    except (OSError, ValueError) as fault:
        raise Refusal(
            f"The folder {folder} cannot be created: {reason(fault)}.",
            "Set GAUGESIDE_HOME to a folder that can be written.",
        ) from fault


def _make_private_folder(folder: Path) -> None:
    if folder.parts[:1] and folder.parts[0].startswith("~"):
        raise Refusal("No home folder is known, so nothing can be kept.", "Set GAUGESIDE_HOME to a folder of yours.")
    if folder.is_dir():
        return
    for one in reversed([folder, *(parent for parent in folder.parents if not parent.exists())]):
        one.mkdir(mode=0o700, exist_ok=True)
        sync_folder(one.parent)


def sync_folder(folder: Path) -> None:
    """Ask the disk to keep the names in `folder`; a system that cannot is left alone."""
    with contextlib.suppress(OSError):
        handle = os.open(folder, os.O_RDONLY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)


def reason(fault: BaseException) -> str:
    """The operating system's own words for `fault`, in lower case."""
    words = fault.strerror if isinstance(fault, OSError) and fault.strerror else str(fault)
    return words[:1].lower() + words[1:]


def _not_written(path: Path, fault: OSError) -> Refusal:
    words = f"{path.name} cannot be written ({reason(fault)})."
    return Refusal(words, "What is on the screen is not remembered; F7 shows the folder.")


def _name_aside(path: Path) -> Path:
    first = path.with_name(path.name + ".unreadable")
    others = [path.with_name(f"{path.name}.unreadable-{number}") for number in range(2, KEPT_ASIDE + 1)]
    return next((name for name in [first, *others] if not os.path.lexists(name)), first)


def _finite(text: str) -> float:
    number = float(text)
    if not math.isfinite(number):
        raise ValueError(f"{text} is not a number")
    return number


def _is_shallow(found: object) -> bool:
    level = [found]
    for _ in range(DEEPEST_NESTING):
        deeper: list[object] = []
        for value in level:
            if isinstance(value, dict):
                deeper.extend(value.values())
            elif isinstance(value, list):
                deeper.extend(value)
        if not deeper:
            return True
        level = deeper
    return False


def _made_plain(found: Any) -> Any:
    if isinstance(found, str):
        return plain_text(found)
    if isinstance(found, list):
        return [_made_plain(value) for value in found]
    if isinstance(found, dict):
        return {plain_text(name): _made_plain(value) for name, value in found.items()}
    return found
