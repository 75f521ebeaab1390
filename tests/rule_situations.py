"""Situations that a formulator meets, one for each rule that excludes."""

from __future__ import annotations

from rule_support import brief_text

VIAL = '[container]\ntype = "glass_vial"\n'
SALINE = '[[excipient]]\nmaterial = "sodium_chloride"\nmmol_l = 120\n'
SUGAR = '[[excipient]]\nmaterial = "sucrose"\npercent_w_v = 8\n'
GLUCOSE = '[[excipient]]\nmaterial = "glucose_anhydrous"\npercent_w_v = 5\n'
ANTIBODY = 'kind = "antibody"\nconcentration_mg_ml = 50'
ENZYME = 'kind = "protein"\nconcentration_mg_ml = 5'
MOLECULE = 'kind = "small_molecule"'
VACCINE = 'kind = "vaccine"'
BETA_LACTAM = f'{MOLECULE}\ngroups = ["beta_lactam"]'
PLATINUM = f'{MOLECULE}\ngroups = ["oxalato_platinum"]'
FROZEN = 'form = "frozen"'
DRIED = 'form = "dried"'
WINDOW = "storage_low = 6.5\nstorage_high = 7.5\n"
GLYCYLGLYCINE = (
    '[[system]]\nid = "glycylglycine_buffer"\nspecies = ["glycylglycine"]\n'
    'base_material = "glycylglycine"\n'
)


def facts(*lines):
    return "[facts]\n" + "\n".join(lines) + "\n"


def calcium(mmol_l):
    return (
        f'[[excipient]]\nmaterial = "calcium_chloride_dihydrate"\nmmol_l = {mmol_l}\n'
    )


def case(route, ph, system, mmol_l, **words):
    return brief_text(route, ph, **words), system, mmol_l


def windowed(ph, drug, rest, *, window=True):
    """A frozen product, with or without limits for its frozen pH."""
    limits = WINDOW if window else ""
    return (
        f'[product]\nroute = "intravenous"\nform = "frozen"\n[ph]\ntarget = {ph}\n'
        f"{limits}[drug]\n{drug}\n{rest}"
    )


def stored(temperature_c):
    return f"[[storage]]\ntemperature_c = {temperature_c}\n"


#: Rule -> (a situation that it excludes, its nearest innocent neighbour).
EXCLUSIONS = {
    # 5 mmol/L of calcium with a phosphate buffer; a trace of it
    "R001": (
        case("intravenous", 7.4, "sodium_phosphate", 10, rest=calcium(5)),
        case("intravenous", 7.4, "sodium_phosphate", 10, rest=calcium(0.01)),
    ),
    # dissolved aluminium; aluminium only as the solid adjuvant
    "R004": (
        case("intramuscular", 6.5, "sodium_phosphate", 10, drug=VACCINE,
             rest=facts("aluminium_salt = true")),
        case("intramuscular", 6.5, "sodium_phosphate", 10, drug=VACCINE,
             rest=facts("aluminium_salt = false",
                        'adjuvant = "aluminium_hydroxyphosphate_sulfate"')),
    ),
    # bicarbonate in a solution with calcium; with sodium chloride alone
    "R007": (
        case("intravenous", 8.0, "sodium_bicarbonate", 50, rest=calcium(1) + SALINE),
        case("intravenous", 8.0, "sodium_bicarbonate", 50, rest=SALINE),
    ),
    # a coagulation factor that needs calcium; an enzyme that does not
    "R008": (
        case("intravenous", 6.8, "sodium_citrate", 10, drug=ENZYME,
             rest=facts("drug_needs_calcium = true")),
        case("intravenous", 6.8, "sodium_citrate", 10, drug=ENZYME,
             rest=facts("drug_needs_calcium = false")),
    ),
    # citrate with an aluminium adjuvant; with an oil-in-water emulsion
    "R017": (
        case("intramuscular", 6.5, "sodium_citrate", 10, drug=VACCINE,
             rest=facts('adjuvant = "aluminium_hydroxide"')),
        case("intramuscular", 6.5, "sodium_citrate", 10, drug=VACCINE,
             rest=facts('adjuvant = "without_aluminium"')),
    ),
    # borate eye drop thickened with polyvinyl alcohol; with hyaluronate
    "R019": (
        case("ophthalmic_topical", 7.4, "sodium_borate", 80,
             rest=facts("polyvinyl_alcohol = true")),
        case("ophthalmic_topical", 7.4, "sodium_borate", 80,
             rest=facts("polyvinyl_alcohol = false", 'gelling_agent = "hyaluronate"')),
    ),
    # borate injected; borate in an eye drop
    "R022": (
        case("subcutaneous", 7.4, "sodium_borate", 20),
        case("ophthalmic_topical", 7.4, "sodium_borate", 20),
    ),
    # frozen with limits for the frozen pH; the same, dilute in sugar
    "R027b": (
        (windowed(7.0, ENZYME, "[[storage]]\ntemperature_c = -20\n"),
         "sodium_phosphate", 50),
        (windowed(7.0, ENZYME, SUGAR), "sodium_phosphate", 10),
    ),
    "R031b": (
        (windowed(6.0, ENZYME, "[[storage]]\ntemperature_c = -20\n").replace(
            "6.5", "5.5").replace("7.5", "6.5"), "sodium_succinate", 50),
        (windowed(6.0, ENZYME, "", window=False), "sodium_succinate", 50),
    ),
    # acetate freeze-dried; the same product as a liquid
    "R038": (
        case("intravenous", 5.0, "sodium_acetate", 10, drug=ENZYME, product=DRIED),
        case("intravenous", 5.0, "sodium_acetate", 10, drug=ENZYME),
    ),
    # bicarbonate freeze-dried with a protein; as the alkali of a sterile powder
    "R039": (
        case("intravenous", 8.0, "sodium_bicarbonate", 20, drug=ENZYME, product=DRIED),
        case("intravenous", 8.0, "sodium_bicarbonate", 20, drug=MOLECULE,
             product=DRIED),
    ),
    # tris with glucose for tonicity; with sucrose
    "R047": (
        case("intravenous", 7.4, "tris_hydrochloride", 20, rest=GLUCOSE),
        case("intravenous", 7.4, "tris_hydrochloride", 20, rest=SUGAR),
    ),
    # an amine buffer in a penicillin solution; in its dry powder
    "R049": (
        case("intravenous", 7.0, "tris_hydrochloride", 20, drug=BETA_LACTAM),
        case("intravenous", 7.0, "tris_hydrochloride", 20, drug=BETA_LACTAM,
             product=DRIED),
    ),
    # tris in a conjugation step; the purified conjugate in tris
    "R053": (
        case("intravenous", 7.5, "tris_hydrochloride", 20, drug=ENZYME,
             rest=facts("amine_reactive_reagent = true")),
        case("intravenous", 7.5, "tris_hydrochloride", 20, drug=ENZYME,
             rest=facts("amine_reactive_reagent = false")),
    ),
    # an oxalato-platinum drug in saline; with tartrate and no chloride
    "R061": (
        case("intravenous", 5.0, "sodium_tartrate", 5, drug=PLATINUM, rest=SALINE),
        case("intravenous", 5.0, "sodium_tartrate", 5, drug=PLATINUM),
    ),
    # a piperazine buffer with riboflavin in light; without the riboflavin
    "R074": (
        case("topical", 7.4, "hepes_sodium", 20,
             rest=facts("light_exposed = true", "flavin_present = true")),
        case("topical", 7.4, "hepes_sodium", 20,
             rest=facts("light_exposed = true", "flavin_present = false")),
    ),
    # bicarbonate in a bag for its shelf life; in glass
    "R085": (
        case("intravenous", 8.0, "sodium_bicarbonate", 100,
             rest='[container]\ntype = "plastic_bag"\n[dose]\nvolume_ml = 250\n'),
        case("intravenous", 8.0, "sodium_bicarbonate", 100,
             rest='[container]\ntype = "glass_bottle"\n[dose]\nvolume_ml = 250\n'),
    ),
    # chlorhexidine with phosphate; with acetate and no chloride
    "R090": (
        case("topical", 5.5, "sodium_phosphate", 10, rest=facts(
            "multidose = true", 'preservatives = ["chlorhexidine"]')),
        case("topical", 5.5, "sodium_acetate", 10, rest=facts(
            "multidose = true", 'preservatives = ["chlorhexidine"]')),
    ),
    # silver nitrate eye drops with phosphate; with acetate
    "R091": (
        case("ophthalmic_topical", 6.0, "sodium_phosphate", 10, drug=MOLECULE,
             rest=facts("silver_present = true")),
        case("ophthalmic_topical", 6.0, "sodium_acetate", 10, drug=MOLECULE,
             rest=facts("silver_present = true")),
    ),
    # benzoate in a syrup for newborns; for small children
    "R107": (
        case("oral_liquid", 4.0, "sodium_benzoate", 10, product='population = "neonate"'),
        case("oral_liquid", 4.0, "sodium_benzoate", 10, product='population = "child"'),
    ),
    # citrate given intrathecally; into a vein
    "R110": (
        case("intrathecal_epidural", 6.8, "sodium_citrate", 5),
        case("intravenous", 6.8, "sodium_citrate", 5),
    ),
    # phosphate with calcium inside the eye; phosphate alone
    "R112": (
        case("intracameral", 7.2, "sodium_phosphate", 5, rest=calcium(1)),
        case("intracameral", 7.2, "sodium_phosphate", 5, rest=SALINE),
    ),
    # ammonium in a large infusion; in a small injection
    "R119": (
        case("intravenous", 9.0, "ammonium_chloride", 10,
             rest="[dose]\nvolume_ml = 250\n"),
        case("intravenous", 9.0, "ammonium_chloride", 10,
             rest="[dose]\nvolume_ml = 2\n"),
    ),
    # a laboratory buffer on a route where nobody used it; where it was used
    "R129": (
        case("intramuscular", 8.0, "glycylglycine_buffer", 10, rest=GLYCYLGLYCINE),
        case("intravenous", 8.0, "glycylglycine_buffer", 10, rest=GLYCYLGLYCINE),
    ),
    # histidine in a penicillin solution; in its dry powder
    "R132": (
        case("intravenous", 6.0, "histidine_hydrochloride", 10, drug=BETA_LACTAM),
        case("intravenous", 6.0, "histidine_hydrochloride", 10, drug=BETA_LACTAM,
             product=DRIED),
    ),
}  # fmt: skip
