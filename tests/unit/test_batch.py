"""Flattening of a call, and what it refuses."""

from __future__ import annotations

import numpy as np
import pytest

from formbuf.chemistry.batch import balance, prepare
from formbuf.chemistry.ionization import Ladder
from formbuf.errors import InputError

ACID = Ladder("acid", 0, (4.756,), (-0.41,), (-142.0,))
AMINE = Ladder("amine", 1, (8.072,), (47.45,), (-59.0,))


def test_inputs_are_broadcast() -> None:
    batch, shape = prepare([ACID, AMINE], np.ones((3, 1, 2)), 0.1, 0.2, [5.0, 25.0])

    assert shape == (3, 2)
    assert batch.size == 6
    assert [t.shape for t in batch.totals] == [(6,), (6,)]
    assert batch.kw.shape == (6,)


def test_one_temperature_is_kept_as_one() -> None:
    batch, _ = prepare([ACID], np.ones((5, 1)), 0.1, 0.2, 25.0)

    assert batch.kw.shape == (1,)
    assert batch.equilibria[0].step_k[0].shape == (1,)


def test_taking_rows_keeps_the_balance() -> None:
    charge = np.linspace(0.0, 0.02, 5)
    batch, _ = prepare([ACID], np.full((5, 1), 0.02), charge, charge, [[5.0]] * 1)
    ph, root = np.linspace(3.0, 6.0, 5), np.full(5, 0.1)
    whole = balance(batch, ph, root)
    rows = np.array([1, 4])
    part = balance(batch.take(rows), ph[rows], root[rows])

    assert part.charge == pytest.approx(whole.charge[rows], abs=1e-17)
    assert batch.take(slice(0, 9)) is batch


def test_constants_of_one_temperature_are_shared_and_safe() -> None:
    first, _ = prepare([ACID], [0.1], 0.0, 0.0, 25.0)
    again, _ = prepare([ACID], [0.1], 0.0, 0.0, 25.0)

    assert first.equilibria[0] is again.equilibria[0]
    with pytest.raises(ValueError, match="read-only"):
        first.equilibria[0].step_k[0][0] = 1.0


def _many(count: int) -> Ladder:
    pka = tuple(float(k) for k in range(1, count + 1))
    return Ladder("many", 0, pka, (0.0,) * count, (0.0,) * count)


@pytest.mark.parametrize(
    ("arguments", "said"),
    [
        (([ACID], [[0.1, 0.2]], 0.0, 0.0, 25.0), "last axis of 1"),
        (([ACID], 0.1, 0.0, 0.0, 25.0), "last axis of 1"),
        (([ACID], [-0.1], 0.0, 0.0, 25.0), "component totals of -0.1"),
        (([ACID], [np.nan], 0.0, 0.0, 25.0), "component totals of nan"),
        (([ACID], [np.inf], 0.0, 0.0, 25.0), "component totals of inf"),
        (([ACID], [1e6], 0.0, 0.0, 25.0), r"allowed are 0 to 1000"),
        (([ACID], [0.1], np.nan, 0.0, 25.0), "strong-ion charge of nan"),
        (([ACID], [0.1], -2000.0, 0.0, 25.0), "strong-ion charge of -2000"),
        (([ACID], [0.1], 0.0, -0.1, 25.0), "squared charge of -0.1"),
        (([ACID], [0.1], 0.0, 0.0, 500.0), "temperature of 500 C"),
        (([ACID], [0.1], 0.0, 0.0, -21.0), "temperature of -21 C"),
        (([ACID], [0.1], 0.0, 0.0, np.nan), "temperature of nan C"),
        (([ACID], [0.1], [0.0, 0.1], 0.0, [1.0, 2.0, 3.0]), "do not fit"),
        (([_many(15)], [0.1], 0.0, 0.0, 25.0), "15 steps: allowed are 14"),
        (
            ([Ladder("x", 0, (40.0,), (0.0,), (0.0,))], [0.1], 0.0, 0.0, 25.0),
            "every pK",
        ),
        (
            ([Ladder("x", 0, (np.nan,), (0.0,), (0.0,))], [0.1], 0.0, 0.0, 25.0),
            "every pK",
        ),
    ],
)
def test_unusable_input_is_named(arguments: tuple[object, ...], said: str) -> None:
    with pytest.raises(InputError, match=said):
        prepare(*arguments)  # type: ignore[arg-type]


def test_only_listed_neutral_first_states_can_be_open() -> None:
    with pytest.raises(InputError, match="does not list"):
        prepare([ACID], [0.1], 0.0, 0.0, 25.0, open_components=["carbonate"])
    with pytest.raises(InputError, match="first state is charged"):
        prepare([AMINE], [0.1], 0.0, 0.0, 25.0, open_components=["amine"])


def test_no_components_at_all() -> None:
    batch, shape = prepare([], np.zeros((4, 0)), 0.0, 0.0, 25.0)

    assert shape == (4,)
    assert batch.ladders == ()
