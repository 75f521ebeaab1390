"""A brief from a file, or from the options of the quick form."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

from formbuf.cli.wording import check_needed
from formbuf.errors import UsageError

if TYPE_CHECKING:
    from formbuf.product.brief import Brief

#: As the sampler takes them (``formbuf.advice.sampling``), which needs numpy.
FEWEST_DRAWS, MOST_DRAWS = 100, 1_000_000
LARGEST_SEED = 2**63 - 1
HINT = "Give a brief file, or at least --ph and --route."


def brief_or_options(path: str | None, options: Mapping[str, Any]) -> Brief:
    """Read a brief, or make one from options.

    Parameters
    ----------
    path : str or None
    options : mapping
        Arguments of ``brief_from_options``; None or empty where not given.

    Raises
    ------
    UsageError
        Both are given, or too little of either.
    InputError
        The brief or a value cannot be used.
    """
    from formbuf.product.brief import brief_from_options, read_brief

    given = [f"--{k.replace('_', '-')}" for k, v in options.items() if _is_given(v)]
    if path is not None:
        if given:
            msg = (
                f"{given[0]} is given beside the brief {path}, allowed one or the other"
            )
            raise UsageError(msg, hint=f"Set it in {path}, or leave the brief out.")
        return read_brief(path)
    check_needed({f"--{name}": options[name] for name in ("ph", "route")}, HINT)
    return brief_from_options(**options)


def _is_given(value: object) -> bool:
    return value is not None and value != ()


def check_draws(draws: int | None, seed: int | None) -> tuple[int | None, int]:
    """Return draws (None: none) and seed, both within what the sampler takes.

    Raises
    ------
    UsageError
        A value is out of range, or a seed is given without draws.
    """
    if draws is None:
        if seed is not None:
            msg = "--seed is given without --draws, allowed both or neither"
            raise UsageError(msg)
        return None, 1
    if not FEWEST_DRAWS <= draws <= MOST_DRAWS:
        msg = f"--draws: {draws}, allowed {FEWEST_DRAWS} to {MOST_DRAWS}"
        raise UsageError(msg)
    if seed is not None and not 0 <= seed <= LARGEST_SEED:
        msg = f"--seed: {seed}, allowed 0 to {LARGEST_SEED}"
        raise UsageError(msg)
    return draws, 1 if seed is None else seed


def check_top(top: int | None) -> int | None:
    """Return a count of places; one below 1 is refused."""
    if top is not None and top < 1:
        msg = f"--top: {top} is too small, allowed 1 or more"
        raise UsageError(msg)
    return top
