"""What one candidate is made of and what it shows, as tables and sentences."""

from __future__ import annotations

from formbuf.report.content import Block, Column, Spans, Text
from formbuf.report.reading import Cursor, cite, spans
from formbuf.report.story import C, Story, is_none, named, number, state_of, table
from formbuf.report.words import STORAGE, word


def composition(story: Story, c: Cursor, slug: str) -> Block:
    """Return what is weighed, the drug apart."""
    role = "titrant" if is_none(c) else "buffer"
    places = [(w, role) for w in c.each("composition")]
    if c.get("tonicity_fill") is not None:
        places.append((c.at("tonicity_fill"), "tonicity agent"))
    rows: list[tuple[Spans, ...]] = []
    for place, role in places:
        key = place.text("material")
        known = story.more.at("names", "materials", key)
        rows.append(
            (
                spans(story.material(key)),
                spans(role),
                spans(place.value("mmol_l", digits=4)),
                spans(place.value("g_l", digits=4)),
                spans(
                    known.value("molar_mass_g_mol", digits=6, trim=True),
                    cite(known.get("source")),
                ),
            )
        )
    for entry in story.brief.each("excipient"):
        key = entry.text("material")
        known = story.more.at("names", "materials", key)
        rows.append(
            (
                spans(story.material(key)),
                spans("excipient"),
                spans(entry.value("mmol_l", digits=4)),
                spans(entry.value("g_l", digits=4)),
                spans(
                    known.value("molar_mass_g_mol", digits=6, trim=True),
                    cite(known.get("source")),
                ),
            )
        )
    if not rows:
        rows.append((spans("nothing is added"), *([spans("-")] * 4)))
    return table(
        f"t-composition-{slug}",
        spans("Composition besides the drug: ", named(c)),
        (
            Column("Material", width=2.8),
            Column("Role", width=1.2),
            number("mmol/L", 0.9),
            number("g/L", 0.9),
            number("Molar mass, g/mol", 1.2),
        ),
        rows,
    )


def states(c: Cursor, slug: str) -> Block:
    """Return pH, capacity and room at each liquid temperature."""
    rows = []
    for s in c.each("states"):
        kinds = ", ".join(word(STORAGE, k) for k in s.get("kinds") or ())
        rows.append(
            (
                spans(
                    s.plain("temperature_c"), " *" if s.get("is_extrapolated") else None
                ),
                spans(kinds),
                spans(s.value("ph", places=2)),
                spans(s.value("ph_slope_per_k", places=4, sign=True)),
                spans(s.value("capacity_mmol_l_ph")),
                spans(s.value("buffer_capacity_mmol_l_ph")),
                spans(s.value("ionic_strength_mol_kg")),
                spans(
                    s.value("acid_to_low_mmol_l"), " / ", s.value("base_to_high_mmol_l")
                ),
            )
        )
    notes = [
        spans(
            "Room: strong acid / strong base that moves the pH as far as the window does at "
            "measurement."
        )
    ]
    if any(s.get("is_extrapolated") for s in c.each("states")):
        notes.append(
            spans("* The ionization data are extrapolated to this temperature.")
        )
    return table(
        f"t-states-{slug}",
        spans("The product at each liquid temperature: ", named(c)),
        (
            number(f"T, {C}", 0.7),
            Column("Occasion", width=1.3),
            number("pH", 0.7),
            number("Slope, pH/K", 0.9),
            number("Capacity, mmol/L per pH", 1.1),
            number("Capacity of the buffer alone, mmol/L per pH", 1.1),
            number("Ionic strength, mol/kg", 1.0),
            number("Room acid / base, mmol/L", 1.3),
        ),
        rows,
        notes,
    )


def preparation(c: Cursor) -> Spans:
    """Say what to read at preparation, and how far the pH moves in store."""
    made, read = state_of(c, "prepare"), state_of(c, "measure")
    drift = c.number("ph_drift")
    words = spans()
    if made is not None and read is not None and made.path != read.path:
        words = spans(
            "Adjusted at ",
            made.plain("temperature_c", unit=C),
            ", the product has to read pH ",
            made.value("ph", places=2),
            " there in order to read ",
            read.value("ph", places=2),
            " at ",
            read.plain("temperature_c", unit=C),
            ". ",
        )
    if drift is None:
        return spans(words, "The product is not stored as a liquid.")
    if abs(drift) < 0.005:
        return spans(
            words, "Between measurement and liquid storage the pH does not move."
        )
    return spans(
        words,
        "From measurement to liquid storage the pH moves by ",
        c.value("ph_drift", places=2, sign=True),
        " at most.",
    )


def species(story: Story, c: Cursor, slug: str) -> list[Block]:
    """Return the dissolved species at the temperature of measurement."""
    rows = [
        (
            spans(story.component(s.text("component"))),
            spans(s.value("charge", places=0, sign=True)),
            spans(s.value("mmol_l")),
        )
        for s in c.each("species_states")
        if (s.number("mmol_l") or 0.0) >= 1e-4
    ]
    if not rows:
        return []
    return [
        table(
            f"t-species-{slug}",
            spans("Dissolved species at the temperature of measurement: ", named(c)),
            (Column("Component", width=2.5), number("Charge"), number("mmol/L")),
            rows,
            [
                spans(
                    "Species below a ten-thousandth of a millimole per litre are left out."
                )
            ],
        )
    ]


def osmolality(story: Story, c: Cursor) -> Spans:
    """Say what the osmolality is made of, and what room is left."""
    room = story.more.at("room", c.text("system"))
    total = c.number("osmolality_mosm_kg")
    if total is None:
        return spans("The osmolality is not known.")
    words = spans(
        "Osmolality of the product: ",
        c.value("osmolality_mosm_kg", places=0, unit="mosmol/kg"),
        "; the buffer alone would bring ",
        c.value("buffer_osmolality_mosm_kg", places=0),
        ". ",
    )
    target = story.brief.at("tonicity", "target_mosm_kg")
    if target.data is not None and c.get("tonicity_fill") is not None:
        words = spans(
            words,
            "Without the tonicity agent the product has ",
            room.value("without_agent_mosm_kg", places=0),
            "; the agent fills the ",
            room.value("to_target_mosm_kg", places=0),
            " left to the target of ",
            target.plain(),
            ". ",
        )
    left = room.number("to_limit_mosm_kg")
    if left is not None and left >= 0.0:
        words = spans(
            words,
            "Room to the upper limit of ",
            story.brief.plain("tonicity", "high_mosm_kg"),
            ": ",
            room.value("to_limit_mosm_kg", places=0, unit="mosmol/kg"),
            ".",
        )
    elif left is not None:
        words = spans(
            words,
            Text("The upper limit of ", strong=True),
            story.brief.plain("tonicity", "high_mosm_kg"),
            " is exceeded.",
        )
    return words
