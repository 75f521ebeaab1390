"""Read a product brief from a TOML file, from options or from plain data.

Whatever is wrong ends as one `InputError` whose message names the file, the key, the
line, the value and what is allowed. Nothing is filled in here; see
`formbuf.product.brief_defaults`.
"""

from __future__ import annotations

import codecs
import difflib
import os
import re
import tomllib
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any

from pydantic import ValidationError

from formbuf.errors import InputError
from formbuf.product.brief_lines import index_lines
from formbuf.product.brief_messages import faults_of, raise_faults
from formbuf.product.brief_model import Brief
from formbuf.product.brief_origin import Location, Origin, key_path

SIZE_LIMIT_BYTES = 1_000_000
NEW_BRIEF_HINT = "A brief needs at least [product] with route and [ph] with target."
_UTF16_MARKS = (codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE)
_TOML_PLACE = re.compile(r"\s*\(at (?:line (\d+), column (\d+)|end of document)\)$")


def read_brief(path: str | os.PathLike[str]) -> Brief:
    """Read and check a product brief.

    Parameters
    ----------
    path : str or path-like
        A TOML file in UTF-8 (with or without a byte-order mark) of at most 1 MB.

    Returns
    -------
    Brief
        As written; nothing is filled in.

    Raises
    ------
    InputError
        The file cannot be read, is no TOML, or does not hold a brief; all faults of
        the content are told at once, each with its key and line.
    """
    name = os.fspath(path)
    text = _decode(_read_bytes(name), name)
    return brief_from_text(text, name=name)


def brief_from_text(text: str, *, name: str = "brief") -> Brief:
    """Check the text of a brief; ``name`` stands for the file in messages.

    Raises
    ------
    InputError
        As `read_brief`.
    """
    text = text.replace("\r\n", "\n")
    if not any(line.split("#")[0].strip() for line in text.splitlines()):
        msg = f"{name}: the file holds no brief, only blanks or comments"
        raise InputError(msg, hint=NEW_BRIEF_HINT)
    index = index_lines(text)
    try:
        data = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise _syntax_error(text, name, str(error)) from error
    except RecursionError as error:
        msg = f"{name}: lists or tables are nested too deeply to read"
        raise InputError(msg) from error
    except ValueError as error:
        line = _line_of_longest_digits(text)
        msg = f"{name} (line {line}): a number is too long, allowed at most 15 digits"
        raise InputError(msg) from error
    return brief_from_mapping(data, origin=Origin(name, index.lines))


def brief_from_mapping(
    data: Mapping[str, Any], *, origin: Origin | None = None
) -> Brief:
    """Check a brief given as nested plain data, as `tomllib` returns it.

    Parameters
    ----------
    data : mapping
        Tables as mappings, lists as lists, keys as in a brief file.
    origin : Origin, optional
        Where the data came from; used in messages and kept with the brief.

    Raises
    ------
    InputError
        All faults at once, one per line.
    """
    origin = origin or Origin()
    try:
        brief = Brief.model_validate(data)
    except ValidationError as error:
        raise_faults(origin, faults_of(error))
        raise
    brief._origin = origin
    return brief


def brief_from_options(
    *,
    ph: float,
    route: str,
    store: Sequence[float] = (),
    form: str | None = None,
    drug_kind: str | None = None,
    drug_mg_ml: float | None = None,
    tonicity_agent: str | None = None,
    volume_ml: float | None = None,
) -> Brief:
    """Make a brief from the options of the quick form.

    Parameters
    ----------
    ph : float
        Target pH, 1 to 13.
    route : str
        Route of administration.
    store : sequence of float
        Storage temperatures, C.
    form : {"liquid", "frozen", "dried"}, optional
    drug_kind : str, optional
        Kind of drug, as in a brief.
    drug_mg_ml : float, optional
        Concentration of the drug, mg/mL.
    tonicity_agent : str, optional
        Material that fills the osmolality up to the target.
    volume_ml : float, optional
        Dose volume, mL.

    Raises
    ------
    InputError
        A value is not allowed; the message names the option.
    """
    options: dict[Location, str] = {
        ("ph", "target"): "--ph",
        ("product", "route"): "--route",
        ("product", "form"): "--form",
        ("drug", "kind"): "--drug-kind",
        ("drug", "concentration_mg_ml"): "--drug-mg-ml",
        ("tonicity", "agent"): "--tonicity-agent",
        ("dose", "volume_ml"): "--volume-ml",
        ("storage",): "--store",
    }
    values = {
        ("ph", "target"): ph,
        ("product", "route"): route,
        ("product", "form"): form,
        ("drug", "kind"): drug_kind,
        ("drug", "concentration_mg_ml"): drug_mg_ml,
        ("tonicity", "agent"): tonicity_agent,
        ("dose", "volume_ml"): volume_ml,
    }
    data: dict[str, Any] = {}
    for (table, key), value in values.items():
        if value is not None:
            data.setdefault(table, {})[key] = value
    data["storage"] = [{"temperature_c": at} for at in store]
    return brief_from_mapping(data, origin=Origin("options", options=options))


def brief_schema() -> dict[str, Any]:
    """Return the JSON Schema of a brief file."""
    schema: dict[str, Any] = Brief.model_json_schema()
    schema["$schema"] = "https://json-schema.org/draft/2020-12/schema"
    schema["title"] = "Product brief"
    return schema


def _read_bytes(name: str) -> bytes:
    path = Path(name)
    is_directory = False
    try:
        is_directory = path.is_dir()
        if not is_directory:
            with path.open("rb") as stream:
                content = stream.read(SIZE_LIMIT_BYTES + 1)
    except FileNotFoundError as error:
        msg = f"{name}: there is no such file"
        raise InputError(msg, hint=_near_file_hint(path)) from error
    except PermissionError as error:
        msg = f"{name}: the file may not be read (permission denied)"
        raise InputError(msg) from error
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        shown = name if name.isprintable() else repr(name)
        msg = f"{shown}: the file cannot be read ({reason})"
        raise InputError(msg) from error
    if is_directory:
        msg = f"{name}: is a directory, allowed a TOML file"
        raise InputError(msg, hint=_files_hint(path))
    if len(content) > SIZE_LIMIT_BYTES:
        msg = f"{name}: the file is larger than a brief can be, allowed at most 1 MB"
        raise InputError(msg)
    return content


def _decode(content: bytes, name: str) -> str:
    if not content.strip():
        msg = f"{name}: the file is empty"
        raise InputError(msg, hint=NEW_BRIEF_HINT)
    if content.startswith(_UTF16_MARKS):
        msg = f"{name}: the file is in UTF-16, allowed UTF-8"
        raise InputError(msg, hint="Save it again as UTF-8 text.")
    content = content.removeprefix(codecs.BOM_UTF8)
    if b"\0" in content:
        msg = (
            f"{name}: the file is no text (it holds zero bytes), allowed TOML in UTF-8"
        )
        raise InputError(msg)
    try:
        return content.decode("utf-8")
    except UnicodeDecodeError as error:
        line = content.count(b"\n", 0, error.start) + 1
        byte = content[error.start]
        msg = (
            f"{name} (line {line}): byte 0x{byte:02x} is not UTF-8, allowed UTF-8 text"
        )
        raise InputError(msg, hint="Save it again as UTF-8 text.") from error


def _files_hint(folder: Path) -> str:
    names = sorted(entry.name for entry in folder.glob("*.toml"))[:3]
    return f"It holds {', '.join(names)}." if names else ""


def _near_file_hint(path: Path) -> str:
    folder = path.parent
    names = [entry.name for entry in folder.glob("*.toml")] if folder.is_dir() else []
    near = difflib.get_close_matches(path.name, names, n=1, cutoff=0.6)
    return f"Did you mean {folder / near[0]}?" if near else ""


def _line_of_longest_digits(text: str) -> int:
    longest = max(re.finditer(r"\d+", text), key=lambda match: len(match[0]))
    return text.count("\n", 0, longest.start()) + 1


def _syntax_error(text: str, name: str, message: str) -> InputError:
    """Return the error for a text that is no TOML, with the key and line if known."""
    for location, first, second in index_lines(text).repeated:
        msg = (
            f"{name}: {key_path(location)} (line {second}): is set twice, "
            f"first on line {first}, allowed once"
        )
        return InputError(msg)
    place = _TOML_PLACE.search(message)
    what = _TOML_PLACE.sub("", message)
    lines = text.split("\n")
    last = max(i for i, line in enumerate(lines, start=1) if line.strip())
    number = int(place[1]) if place and place[1] else last
    number = min(max(number, 1), last)
    line = lines[number - 1].strip()
    key = re.match(r"[\w.\-\"']+(?=\s*=)", line)
    where = f"{key[0]} (line {number})" if key else f"line {number}"
    shown = line if len(line) <= 60 else line[:57] + "..."
    msg = f"{name}: {where}: not valid TOML: {what}; the line reads {shown!r}"
    hint = ""
    if key and re.search(r"=\s*[^\s\"'\[{]", line):
        hint = "Texts stand in quotes, decimals have a point: 6.0, not 6,0."
    return InputError(msg, hint=hint)
