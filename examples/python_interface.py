"""The Python interface from end to end: brief, shortlist, freezing, bench, tables.

Run it from the folder of the examples or anywhere else::

    python examples/python_interface.py
"""

from __future__ import annotations

from pathlib import Path

import numpy as np

import formbuf
from formbuf.advice.freeze_thaw import compare_freezing
from formbuf.bench.predict import predict
from formbuf.chemistry.equilibrium import solve
from formbuf.output.serialise import shortlist_dict
from formbuf.product.composition import ladder_of

HERE = Path(__file__).resolve().parent


def main() -> None:
    """Walk through the interface and print what it gives."""
    library = formbuf.load_library()
    brief = formbuf.read_brief(HERE / "antibody.toml")

    # the main job: every acceptable buffer, ranked, as a record and as a pandas table
    result = formbuf.shortlist(brief, library)
    print(result)
    columns = ["rank", "system", "concentration_mmol_l", "ph_drift", "desirability"]
    print(result.table[columns].head(4).round(3).to_string(index=False))

    # one candidate: why it stands where it does
    lead = result.lead
    if lead is not None:
        for name, criterion in lead.criteria.items():
            print(f"  {name}: {criterion.desirability:.2f} ({criterion.text})")

    # the same data as JSON would hold them
    data = shortlist_dict(result, top=1)
    print(data["schema"], data["knowledge"]["version"], len(data["candidates"]))

    # a composition at three temperatures
    made = predict(
        library,
        {"sodium_acetate_trihydrate": 20.0, "acetic_acid_glacial": 10.0},
        (5.0, 25.0, 40.0),
    )
    print(made)
    print(
        made.table[["temperature_c", "ph", "osmolality_mosm_kg"]].round(2).to_string()
    )

    # what freezing does to the lead
    if lead is not None:
        frozen = compare_freezing(brief, library)
        print(frozen)
        print(frozen.systems[0].verdict)

    # the solver itself takes arrays: 10 mmol/kg tris over a range of acid, 25 C
    tris = ladder_of(library.get_species("tris"))
    acid = np.linspace(0.0, 0.01, 6)
    solution = solve([tris], np.full((6, 1), 0.01), -acid, acid, 25.0)
    print(np.round(solution.ph, 2))


if __name__ == "__main__":
    main()
