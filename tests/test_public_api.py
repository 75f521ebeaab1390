"""The public names are a list, and each of them resolves."""

from __future__ import annotations

import inspect
import subprocess
import sys

import pytest

import formbuf

PUBLIC = [
    "Brief",
    "Library",
    "__version__",
    "load_library",
    "read_brief",
    "shortlist",
]


def test_the_list_is_what_it_was() -> None:
    assert sorted(formbuf.__all__) == PUBLIC
    assert dir(formbuf) == PUBLIC


@pytest.mark.parametrize("name", PUBLIC)
def test_every_name_resolves(name: str) -> None:
    assert getattr(formbuf, name) is not None


@pytest.mark.parametrize("name", [n for n in PUBLIC if n != "__version__"])
def test_every_name_is_described(name: str) -> None:
    text = inspect.getdoc(getattr(formbuf, name)) or ""
    assert len(text) > 30, name


def test_an_unknown_name_is_refused() -> None:
    with pytest.raises(AttributeError, match="no attribute 'shortlst'"):
        _ = formbuf.shortlst


def test_the_solver_is_reached_as_an_attribute() -> None:
    import formbuf.chemistry.equilibrium

    assert callable(formbuf.chemistry.equilibrium.solve)


def test_import_of_the_package_is_light() -> None:
    code = "import sys, formbuf; print(*sorted(sys.modules))"
    done = subprocess.run(
        [sys.executable, "-c", code], capture_output=True, text=True, check=True
    )
    loaded = set(done.stdout.split())
    assert not loaded & {"numpy", "pydantic", "typer", "pandas", "rich"}


def test_a_shortlist_from_python() -> None:
    from formbuf.product.brief import brief_from_options

    library = formbuf.load_library()
    brief = brief_from_options(ph=6.0, route="subcutaneous", store=[5.0])
    result = formbuf.shortlist(brief, library)
    assert result.lead is not None
    table = result.table
    assert {"rank", "system", "standing", "desirability"} <= set(table.columns)
    assert len(table) == len(result.candidates)
