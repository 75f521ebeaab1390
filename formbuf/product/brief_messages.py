"""Turn what pydantic finds wrong with a brief into short sentences of our own.

A message reads ``FILE: key.path (line N): what, value X, allowed Y``. All faults of a
brief are told at once, in the order of the file, one per line.
"""

from __future__ import annotations

import dataclasses
import functools
import typing
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

from pydantic import BaseModel, ValidationError

from formbuf.errors import InputError, nearest
from formbuf.product.brief_model import Brief
from formbuf.product.brief_origin import Location, Origin, key_path
from formbuf.product.vocabulary import MEANT

FAULTS_SHOWN = 25
HINTS_SHOWN = 6
CHOICES_SHOWN = 20
VALUE_LENGTH = 40
UNKNOWN_KEY = "unknown key"
_ABSENT = object()


@dataclass(frozen=True, slots=True)
class Fault:
    """One thing wrong: where, what, which value, what is allowed, what was meant."""

    location: Location
    what: str
    allowed: str = ""
    value: object = _ABSENT
    hint: str = ""


def raise_faults(origin: Origin, faults: Iterable[Fault]) -> None:
    """Raise one `InputError` that tells all faults; do nothing where there are none.

    Raises
    ------
    InputError
        One line per fault, in the order of the file.
    """
    ordered = sorted(faults, key=lambda fault: origin.line(fault.location) or 0)
    if not ordered:
        return
    lines = [_sentence(origin, fault) for fault in ordered[:FAULTS_SHOWN]]
    if len(ordered) > FAULTS_SHOWN:
        lines.append(f"{origin.name}: and {len(ordered) - FAULTS_SHOWN} more faults")
    hints = list(dict.fromkeys(fault.hint for fault in ordered if fault.hint))
    raise InputError("\n".join(lines), hint=" ".join(hints[:HINTS_SHOWN]))


def _sentence(origin: Origin, fault: Fault) -> str:
    parts = [f"{origin.where(fault.location)}: {fault.what}"]
    if fault.value is not _ABSENT:
        parts.append(f"value {show(fault.value)}")
    if fault.allowed:
        parts.append(f"allowed {fault.allowed}")
    return ", ".join(parts)


def show(value: object) -> str:
    """Return a value as it may stand in a message: short, on one line."""
    if isinstance(value, bool):
        return "true" if value else "false"
    if isinstance(value, Mapping):
        return "a table"
    if isinstance(value, list | tuple):
        return f"a list of {len(value)}"
    if isinstance(value, int) and abs(value) >= 10**15:
        return "a whole number of more than 15 digits"
    if isinstance(value, int | float):
        return f"{value:.10g}"
    text = repr(value) if isinstance(value, str) else str(value)
    return text if len(text) <= VALUE_LENGTH else text[: VALUE_LENGTH - 4] + "...'"


def meant(name: str, known: Sequence[str]) -> str:
    """Return the known name most likely meant by ``name``, or an empty text."""
    plain = name.strip().lower().replace("-", "_").replace(" ", "_").replace(".", "")
    if plain in known:
        return plain
    if MEANT.get(plain) in known:
        return MEANT[plain]
    close = nearest(plain, known, 1)
    return close[0] if close else ""


def suggest(name: object, known: Sequence[str]) -> str:
    """Return the hint for a name that is not known, or an empty text."""
    near = meant(name, known) if isinstance(name, str) else ""
    return f"Did you mean {near!r} instead of {show(name)}?" if near else ""


def choices(known: Sequence[str], near: str = "") -> str:
    """Return known names as one phrase; long lists are cut."""
    if len(known) <= CHOICES_SHOWN:
        return ", ".join(known)
    head = [near] if near else []
    head += [name for name in known if name != near][: CHOICES_SHOWN - len(head)]
    return ", ".join(head) + f" and {len(known) - len(head)} more"


def faults_of(error: ValidationError) -> list[Fault]:
    """Return the faults that pydantic found in a brief."""
    found: list[Fault] = []
    for detail in error.errors(include_url=False):
        location: Location = tuple(part for part in detail["loc"] if part != "[key]")
        if detail["type"] == "brief_faults":
            value = detail["input"]
            for below, what, allowed in detail["ctx"]["faults"]:
                at = location + below
                found.append(Fault(at, what, allowed, _value_at(value, below)))
        else:
            found.append(_fault(detail["type"], location, detail))
    return _without_echoes(found)


def _without_echoes(faults: list[Fault]) -> list[Fault]:
    """Drop a missing key where an unknown one beside it is its misspelling."""
    misspelt = {
        (*fault.location[:-1], meant(str(fault.location[-1]), _keys_beside(fault)))
        for fault in faults
        if fault.what == UNKNOWN_KEY
    }
    return [
        fault
        for fault in faults
        if not (fault.what.startswith("is missing") and fault.location in misspelt)
    ]


def _keys_beside(fault: Fault) -> list[str]:
    parent = _model_at(fault.location[:-1])
    return list(parent.model_fields) if parent is not None else []


def _value_at(value: object, below: Location) -> object:
    """Return what stands at a place within a value, or the mark of its absence."""
    if not below:
        return _ABSENT if isinstance(value, Mapping) else value
    for part in below:
        if isinstance(value, Mapping):
            value = value.get(part)
        elif isinstance(value, list | tuple) and isinstance(part, int):
            value = value[part]
        else:
            return _ABSENT
    return _ABSENT if value is None or isinstance(value, Mapping) else value


def _fault(kind: str, location: Location, detail: Any) -> Fault:
    value = detail["input"]
    if kind == "missing":
        return _missing(location)
    if kind == "extra_forbidden":
        return _unknown_key(location)
    if kind in {"model_type", "dict_type", "model_attributes_type"}:
        key = key_path(tuple(part for part in location if isinstance(part, str)))
        once = "once" if isinstance(value, list) else "and its keys below"
        hint = f"Write [{key}], {once}."
        return Fault(location, "must be a table", f"keys below [{key}]", value, hint)
    if kind == "tuple_type":
        return _not_a_list(location, value)
    if kind.endswith(("too_long", "too_short")):
        bounds = detail["ctx"]
        bound = bounds.get("max_length", bounds.get("min_length"))
        is_long = kind.endswith("too_long")
        noun = "letters" if isinstance(value, str) else "entries"
        allowed = f"at {'most' if is_long else 'least'} {bound} {noun}"
        return Fault(
            location, f"is too {'long' if is_long else 'short'}", allowed, value
        )
    if kind == "literal_error":
        known = _literals(location)
        near = meant(value, known) if isinstance(value, str) else ""
        what = "is not one of the words known here"
        return Fault(location, what, choices(known, near), value, suggest(value, known))
    if kind.startswith("string"):
        return Fault(location, "must be a text", "a text in quotes", value)
    if kind.startswith("bool"):
        return Fault(location, "must be true or false", "true, false", value)
    return Fault(location, _number_fault(kind, value), _range(location), value)


_NUMBER_FAULTS = {
    "finite_number": "is no finite number",
    "greater_than_equal": "is too small",
    "greater_than": "is too small",
    "less_than_equal": "is too large",
    "less_than": "is too large",
}


def _number_fault(kind: str, value: object) -> str:
    if kind in _NUMBER_FAULTS:
        return _NUMBER_FAULTS[kind]
    if isinstance(value, int) and not isinstance(value, bool):
        return "is too large"
    return "must be a whole number" if kind.startswith("int") else "must be a number"


def _missing(location: Location) -> Fault:
    model = _model_at(location)
    if model is None:
        return Fault(location, "is missing", _allowed(location))
    required = [name for name, info in model.model_fields.items() if info.is_required()]
    key = key_path(location)
    what = f"is missing: a brief needs [{key}] with {' and '.join(required)}"
    return Fault(location, what)


def _allowed(location: Location) -> str:
    """Return what may stand at a location, in words."""
    kind, _ = _steps(location)
    if kind is str:
        return "a text in quotes"
    if kind in {int, float}:
        return _range(location)
    if typing.get_origin(kind) is typing.Literal:
        return choices(_literals(location))
    return "at least one entry" if typing.get_origin(kind) in {tuple, dict} else ""


def _unknown_key(location: Location) -> Fault:
    name = str(location[-1])
    fault = Fault(location, UNKNOWN_KEY)
    known = _keys_beside(fault)
    hint = suggest(name, known)
    if not hint:
        homes = _homes().get(name, ())
        if homes == ("",):
            hint = f"{name!r} belongs at the top of the file, before the first table."
        elif homes:
            hint = f"{name!r} belongs in {' or '.join(f'[{home}]' for home in homes)}."
    return dataclasses.replace(fault, allowed=choices(known), hint=hint)


def _not_a_list(location: Location, value: object) -> Fault:
    key = key_path(tuple(part for part in location if isinstance(part, str)))
    if isinstance(value, Mapping):
        hint = f"Write [[{key}]] above each entry."
        return Fault(location, "must be a list of tables", f"[[{key}]]", value, hint)
    hint = f"Write {location[-1]} = [{show(value)}]."
    return Fault(location, "must be a list", "values in square brackets", value, hint)


def _steps(location: Location) -> tuple[Any, Sequence[Any]]:
    """Return the type at a location of the brief and the constraints upon it."""
    kind: Any = Brief
    metadata: Sequence[Any] = ()
    for part in location:
        kind = _bare(kind)
        if isinstance(part, int) or typing.get_origin(kind) is dict:
            arguments = typing.get_args(kind)
            kind = arguments[-1 if typing.get_origin(kind) is dict else 0]
            metadata = getattr(kind, "__metadata__", ())
        elif isinstance(kind, type) and issubclass(kind, BaseModel):
            info = kind.model_fields.get(part)
            if info is None:
                return None, ()
            kind, metadata = info.annotation, info.metadata
        else:
            return None, ()
    return _bare(kind), metadata


def _bare(kind: Any) -> Any:
    """Return a type without Annotated and without ``| None``."""
    for _ in range(5):
        arguments = typing.get_args(kind)
        if hasattr(kind, "__metadata__"):
            kind = arguments[0]
        elif type(None) in arguments:
            kind = next(item for item in arguments if item is not type(None))
        else:
            return kind
    return kind


def _model_at(location: Location) -> type[BaseModel] | None:
    kind, _ = _steps(location)
    is_model = isinstance(kind, type) and issubclass(kind, BaseModel)
    return kind if is_model else None


def _literals(location: Location) -> list[str]:
    kind, _ = _steps(location)
    if typing.get_origin(kind) is typing.Literal:
        return [str(word) for word in typing.get_args(kind)]
    return []


def _range(location: Location) -> str:
    """Return the range of numbers allowed at a location, in words."""
    _, metadata = _steps(location)
    bounds: dict[str, Any] = {}
    for item in _flat(metadata):
        for name in ("ge", "gt", "le", "lt"):
            if hasattr(item, name):
                bounds[name] = getattr(item, name)
    low, high = bounds.get("ge", bounds.get("gt")), bounds.get("le", bounds.get("lt"))
    if low is None or high is None:
        return "a number"
    if "gt" in bounds:
        return f"above {low:g} to {high:g}"
    return f"{low:g} to {high:g}"


def _flat(metadata: Sequence[Any]) -> Iterable[Any]:
    for item in metadata:
        if hasattr(item, "metadata"):
            yield from item.metadata
        else:
            yield item


@functools.cache
def _homes() -> dict[str, tuple[str, ...]]:
    """Return, for every key of a brief, the tables that hold it ("" is the top)."""
    homes: dict[str, list[str]] = {}

    def visit(model: type[BaseModel], path: str) -> None:
        for name, info in model.model_fields.items():
            homes.setdefault(name, []).append(path)
            kind = _bare(info.annotation)
            if typing.get_origin(kind) is tuple:
                kind = _bare(typing.get_args(kind)[0])
            if isinstance(kind, type) and issubclass(kind, BaseModel):
                visit(kind, f"{path}.{name}" if path else name)

    visit(Brief, "")
    return {name: tuple(paths) for name, paths in homes.items()}
