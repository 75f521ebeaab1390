"""Read a JSON result of an earlier run."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

from formbuf.errors import InputError

#: Schemas that can be compared, without their version.
SCHEMAS = ("formbuf.shortlist", "formbuf.rationale")
VERSION = "1"
SIZE_LIMIT_BYTES = 50_000_000
HINT = "Write one with `formbuf shortlist BRIEF.toml --json -o RESULT.json`."


def read_result(path: str) -> dict[str, Any]:
    """Read a shortlist or rationale from its JSON file.

    Parameters
    ----------
    path : str

    Returns
    -------
    dict
        As written.

    Raises
    ------
    InputError
        The file cannot be read, is no JSON, or holds something else.
    """
    data = _parse(_text(path), path)
    if not isinstance(data, dict):
        raise InputError(f"{path}: no result of formbuf, allowed an object", hint=HINT)
    schema = data.get("schema")
    name, _, version = str(schema).partition("/")
    if name not in SCHEMAS:
        shown = repr(schema)[:60]
        allowed = " or ".join(f"{s}/{VERSION}" for s in SCHEMAS)
        msg = f"{path}: schema {shown} cannot be compared, allowed {allowed}"
        raise InputError(msg, hint=HINT)
    if version != VERSION:
        msg = f"{path}: version {version[:20]!r} of {name}, allowed {VERSION}"
        raise InputError(msg, hint="Compute both results with this version of formbuf.")
    faults = _faults(data)
    if faults:
        raise InputError(f"{path}: {faults[0]}", hint=HINT)
    return data


def _text(path: str) -> str:
    try:
        place = Path(path)
        if place.is_file() and place.stat().st_size > SIZE_LIMIT_BYTES:
            msg = f"{path}: larger than {SIZE_LIMIT_BYTES // 1_000_000} MB, no result of formbuf"
            raise InputError(msg)
        return place.read_text(encoding="utf-8-sig")
    except UnicodeDecodeError as error:
        raise InputError(f"{path}: is no text in UTF-8", hint=HINT) from error
    except (OSError, ValueError) as error:
        if isinstance(error, InputError):
            raise
        reason = getattr(error, "strerror", None) or str(error)
        raise InputError(f"{path}: cannot be read ({reason})") from error


def _parse(text: str, path: str) -> Any:
    try:
        return json.loads(text, parse_constant=_refuse)
    except json.JSONDecodeError as error:
        msg = f"{path} (line {error.lineno}): is no JSON: {error.msg}"
        raise InputError(msg, hint=HINT) from error
    except (ValueError, RecursionError) as error:
        msg = f"{path}: is no JSON that can be read: {error}"
        raise InputError(msg, hint=HINT) from error


def _refuse(name: str) -> Any:
    msg = f"{name} is no number of JSON"
    raise ValueError(msg)


def _faults(data: dict[str, Any]) -> list[str]:
    """Say what a result must hold to be compared."""
    faults = []
    for key, kind in (("brief", dict), ("candidates", list), ("knowledge", dict)):
        if not isinstance(data.get(key), kind):
            faults.append(f"{key} is missing or of another kind")
    for place, entry in enumerate(data.get("candidates") or ()):
        if not isinstance(entry, dict) or not isinstance(entry.get("system"), str):
            faults.append(f"candidates[{place}].system is missing")
            break
        if not isinstance(entry.get("criteria", {}), dict):
            faults.append(f"candidates[{place}].criteria is of another kind")
            break
    return faults
