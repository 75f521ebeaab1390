"""``formbuf predict``: pH and more of a composition at temperatures."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Annotated

import typer

from formbuf.cli.frame import command_app, examples
from formbuf.cli.options import (
    FormatOption,
    JsonOption,
    KnowledgeOption,
    OutputOption,
    open_library,
)
from formbuf.errors import InputError, UsageError, nearest

if TYPE_CHECKING:
    from formbuf.bench.predict import Amounts

app = command_app()


@app.command(
    "predict",
    epilog=examples(
        "formbuf predict --add sodium_acetate_trihydrate=20 \\",
        "    --add acetic_acid_glacial=10 --at 25 --at 5",
        "formbuf predict --add potassium_dihydrogen_phosphate=25 \\",
        "    --add disodium_hydrogen_phosphate_anhydrous=25 --basis molal --json",
    ),
)
def predict_command(
    add: Annotated[
        list[str] | None,
        typer.Option(
            metavar="MATERIAL=AMOUNT",
            help="Material and its amount; may be repeated.",
        ),
    ] = None,
    at: Annotated[
        list[str] | None,
        typer.Option(metavar="C", help="Temperature, 25 if absent; may be repeated."),
    ] = None,
    basis: Annotated[
        str | None,
        typer.Option(
            metavar="BASIS", help="solution (per litre) or molal (per kg of water)."
        ),
    ] = None,
    amounts: Annotated[
        str | None,
        typer.Option(
            metavar="UNIT", help="mmol/L, g/L, or per kg of water: mmol/kg, g/kg."
        ),
    ] = None,
    open_to_carbon_dioxide: Annotated[
        str | None,
        typer.Option(
            metavar="PA", help="Pressure of carbon dioxide, Pa; closed if absent."
        ),
    ] = None,
    knowledge: KnowledgeOption = None,
    format_: FormatOption = None,
    json_: JsonOption = False,
    output: OutputOption = None,
) -> None:
    """Predict pH, ionic strength, capacity and osmolality of a composition.

    A material is named by its id, or by a formula or name that only one has; see
    `formbuf knowledge show materials`.
    """
    from formbuf.cli.emit import Target, emit
    from formbuf.cli.numbers import number, numbers

    target = Target(format_, json_, output)
    target.check()
    materials = parse_materials(add or ())
    unit = unit_of(basis, amounts)
    temperatures = numbers("--at", at) or (25.0,)
    pressure = number("--open-to-carbon-dioxide", open_to_carbon_dioxide)
    from formbuf.bench.predict import predict
    from formbuf.output.predict_page import predict_page

    library = open_library(knowledge)
    named = [library.find_material(name, where="--add").id for name in materials]
    refuse_repeated(named)
    result = predict(
        library,
        dict(zip(named, materials.values(), strict=True)),
        temperatures,
        amounts=unit,
        open_to_carbon_dioxide_pa=pressure,
    )
    emit(predict_page(result), target)


def parse_materials(texts: Sequence[str]) -> dict[str, float]:
    """Return materials and amounts from texts such as ``sucrose=240``.

    Raises
    ------
    UsageError
        No text, one without ``=``, or a material given twice.
    InputError
        An amount that is no number.
    """
    if not texts:
        msg = "--add is not given, allowed at least one MATERIAL=AMOUNT"
        raise UsageError(msg, hint="For example --add sucrose=240.")
    found: dict[str, float] = {}
    for text in texts:
        name, equals, amount = text.rpartition("=")
        name = name.strip()
        if not equals or not name:
            msg = f"--add: {text!r} has no amount, allowed MATERIAL=AMOUNT"
            raise UsageError(msg, hint="For example --add sucrose=240.")
        refuse_repeated([*found, name])
        found[name] = _amount(text, name, amount)
    return found


def refuse_repeated(names: Sequence[str]) -> None:
    """Refuse a material that is added twice, under whichever names."""
    for place, name in enumerate(names):
        if name in names[:place]:
            msg = f"--add: {name} is given twice, allowed once"
            raise UsageError(msg, hint="Give the sum of both amounts.")


def _amount(text: str, name: str, amount: str) -> float:
    try:
        value = float(amount)
    except ValueError:
        msg = f"--add: {text!r}: the amount of {name} is no number, value {amount!r}"
        hint = "Decimals have a point: 6.0, not 6,0." if "," in amount else ""
        raise InputError(msg, hint=hint) from None
    if not 0.0 <= value < float("inf"):
        msg = f"--add: {text!r}: the amount of {name} is {amount}, allowed 0 or more"
        raise InputError(msg)
    return value


def unit_of(basis: str | None, amounts: str | None) -> Amounts:
    """Return the unit of the amounts from both options.

    Raises
    ------
    UsageError
        An option is unknown, or they contradict each other.
    """
    from formbuf.bench.predict import AMOUNTS, BASES

    if basis is not None and basis not in BASES:
        _refuse("--basis", basis, BASES)
    per = "kg" if basis == "molal" else "L"
    if amounts is None:
        return "mmol/kg" if basis == "molal" else "mmol/L"
    for unit in AMOUNTS:
        if unit.casefold() == amounts.casefold():
            if basis is not None and not unit.endswith(per):
                msg = f"--amounts {unit} contradicts --basis {basis}"
                raise UsageError(msg, hint=f"With it, allowed are mmol/{per}, g/{per}.")
            return unit
    return _refuse("--amounts", amounts, AMOUNTS)


def _refuse(option: str, value: str, allowed: Sequence[str]) -> Amounts:
    near = nearest(value, allowed, 1)
    hint = f"Did you mean {near[0]}?" if near else ""
    msg = f"{option}: unknown value {value!r}, allowed {', '.join(allowed)}"
    raise UsageError(msg, hint=hint)
