"""The questions of a guided brief, in the order in which they are asked."""

from __future__ import annotations

from typing import Any, get_args

from formbuf.library import Library
from formbuf.product import interview_readers as readers
from formbuf.product.interview import Answers, Question
from formbuf.product.vocabulary import (
    ContainerType,
    DrugKind,
    Form,
    Population,
    Route,
)

PROTEINS = ("antibody", "fusion_protein", "protein")
SMALL = ("small_molecule", "peptide", "oligonucleotide")
CHILDREN = ("neonate", "infant", "child")
#: Routes on which osmolality does not matter.
WITHOUT_TONICITY = ("oral_liquid", "topical", "otic")


def questions(library: Library) -> list[Question]:
    """Return every question; which of them is asked depends on the answers.

    Parameters
    ----------
    library : Library
        Its systems and species are named in explanations.
    """
    return [*_product(), *_ph_and_storage(), *_use(), *_drug(), *_rest(library)]


def _is(key: str, *values: str) -> Any:
    return lambda answers: answers.get(key) in values


def _known(answers: Answers, key: str) -> bool:
    return answers.get(key) is not None


def _product() -> list[Question]:
    return [
        Question(
            "title",
            "What is the product, in one line?",
            "A name or a short description for your own records, for example "
            "'nasal spray of X, 10 mg/mL'. It changes no result.",
            readers.plain,
        ),
        Question(
            "product.route",
            "How is it given?",
            "The route decides which buffers have precedent, how much of them is "
            "usual, which pH and osmolality are borne, and which limits apply.",
            readers.one_of(get_args(Route)),
            choices=get_args(Route),
            required=True,
        ),
        Question(
            "ph.target",
            "Which pH do you aim at?",
            "The pH at which the drug is stable and soluble and which the route bears, "
            "measured at 25 C. Where you do not know it yet, take the best guess from "
            "preformulation: everything can be computed again.",
            readers.number,
            required=True,
        ),
        Question(
            "product.form",
            "In which form is it stored?",
            "liquid: a solution, refrigerated or at room temperature. frozen: a "
            "solution kept frozen and thawed. dried: freeze-dried or a powder. "
            "Freezing and drying bring their own question, how far the pH moves. "
            "Without an answer it is taken as liquid.",
            readers.one_of(get_args(Form)),
            choices=get_args(Form),
        ),
        Question(
            "drug.kind",
            "What kind of drug is it?",
            "It decides which buffers are usual for such products and which rules "
            "apply. For a placebo or a diluent say none.",
            readers.one_of(get_args(DrugKind)),
            choices=get_args(DrugKind),
        ),
    ]


def _window(data: dict[str, Any], value: tuple[float, float]) -> None:
    data.setdefault("ph", {}).update(low=value[0], high=value[1])


def _storage(data: dict[str, Any], value: list[float]) -> None:
    entries = [{"temperature_c": at} for at in value]
    data.setdefault("storage", []).extend(entries)


def _use_temperature(data: dict[str, Any], value: list[float]) -> None:
    entries = [{"kind": "use", "temperature_c": at, "state": "liquid"} for at in value]
    data.setdefault("storage", []).extend(entries)


def _ph_and_storage() -> list[Question]:
    return [
        Question(
            "ph.low",
            "Between which pH must it stay over its shelf life?",
            "Two numbers, the lower first, for example 5.7 6.3, as measured at 25 C. "
            "The room between them and the loads decide how much buffer is needed. "
            "Without an answer 0.3 to either side is taken.",
            readers.pair,
            _window,
            open_line="low =, high =",
        ),
        Question(
            "storage.temperature_c",
            "At which temperatures is it stored, C?",
            "One or more numbers or a range, for example 5, 2-8, or -40 5; for room "
            "temperature say 25. The pH of amine buffers moves with temperature, and "
            "below the first ice the salts concentrate.",
            readers.numbers,
            _storage,
            open_line=None,
        ),
        Question(
            "storage.use",
            "At which temperature is the reconstituted solution kept until use, C?",
            "One or more numbers, for example 25.",
            readers.numbers,
            _use_temperature,
            _is("product.form", "dried"),
            open_line=None,
        ),
        Question(
            "container.type",
            "What is it filled into?",
            "Glass gives off alkali, plastic lets gases pass, syringes can bring "
            "tungsten; rules test it. Without an answer the usual container of the "
            "route is taken and marked as assumed.",
            readers.one_of(get_args(ContainerType)),
            choices=get_args(ContainerType),
        ),
        Question(
            "container.fill_volume_ml",
            "How much is filled into one container, mL?",
            "Small containers have more glass surface for each millilitre and so give "
            "off more alkali.",
            readers.number_in("mL"),
            None,
            lambda a: str(a.get("container.type") or "").startswith("glass"),
        ),
        Question(
            "container.gas_permeable",
            "Does carbon dioxide pass the wall of the pack over its shelf life?",
            "Yes for most bags and thin bottles without an overwrap. A bicarbonate "
            "buffer would then lose its gas and its pH.",
            readers.yes_no,
            None,
            lambda a: str(a.get("container.type") or "").startswith("plastic"),
        ),
    ]


def _use() -> list[Question]:
    infused = _is("product.route", "intravenous")
    return [
        Question(
            "product.population",
            "Who are the youngest patients?",
            "Limits of some substances are stricter for children. Without an answer "
            "adults are taken.",
            readers.one_of(get_args(Population)),
            choices=get_args(Population),
        ),
        Question(
            "dose.volume_ml",
            "How large is one dose, mL?",
            "With the doses of a day it gives what the buffer brings to the patient, "
            "against limits for sodium, phosphate and others. For a spray give the "
            "volume of all puffs of a dose; for a drop about 0.04.",
            readers.number_in("mL"),
        ),
        Question(
            "dose.per_day",
            "How many doses are given in a day?",
            "For a dose every two weeks say 0.07.",
            readers.number,
        ),
        Question(
            "dose.infusion_rate_ml_h",
            "How fast is it infused, mL/h?",
            "Leave it unknown for an injection within minutes. Citrate has a limit of "
            "rate.",
            readers.number_in("mL/h"),
            None,
            infused,
        ),
        Question(
            "dose.body_mass_kg",
            "What is the lowest body mass of the patients, kg?",
            "Some limits are per kilogram of body mass.",
            readers.number_in("kg"),
            None,
            lambda a: a.get("product.population") in CHILDREN or infused(a),
        ),
    ]


def _drug() -> list[Question]:
    small = _is("drug.kind", *SMALL)
    protein = _is("drug.kind", *PROTEINS)

    def has_drug(answers: Answers) -> bool:
        return answers.get("drug.kind") not in (None, "none")

    return [
        Question(
            "drug.concentration_mg_ml",
            "How concentrated is the drug, mg/mL?",
            "The drug takes up volume, and a concentrated protein or a drug with a pK "
            "near the target pH buffers by itself.",
            readers.number_in("mg/mL"),
            None,
            has_drug,
        ),
        Question(
            "drug.molar_mass_g_mol",
            "What is the molar mass of the form that is weighed, g/mol?",
            "Needed to count the protons and the counter-ions of the drug.",
            readers.number_in("g/mol"),
            None,
            lambda a: small(a) and _known(a, "drug.concentration_mg_ml"),
        ),
        Question(
            "drug.pka",
            "What are the pK values of the drug?",
            "Each group with its kind: acid 4.3 for a group that is neutral when "
            "protonated, base 9.1 for one that is charged when protonated; several "
            "separated by commas. It decides whether the drug needs a buffer at all.",
            readers.pka_steps,
            None,
            lambda a: small(a) and _known(a, "drug.molar_mass_g_mol"),
            open_line=None,
        ),
        Question(
            "drug.counter_ion",
            "With which ion does the drug come as a salt?",
            "For example sodium, chloride, acetate or phosphate; unknown for the free "
            "acid or base. A drug salt of a buffer species buffers too.",
            lambda text: readers.names(text)[0],
            None,
            lambda a: _known(a, "drug.pka"),
        ),
        Question(
            "drug.isoelectric_point",
            "What is the isoelectric point of the protein?",
            "Near it a protein is least soluble and aggregates most readily.",
            readers.number,
            None,
            protein,
        ),
    ]


def _rest(library: Library) -> list[Question]:
    families = ", ".join(
        s.species[0]
        for s in list(library.systems.values())
        if s.role == "buffer" and len(s.species) == 1 and "sodium" in s.id
    )

    def tonic(answers: Answers) -> bool:
        return answers.get("product.route") not in WITHOUT_TONICITY

    return [
        Question(
            "tonicity.agent",
            "What fills the osmolality up to that of the body?",
            "A material, for example sodium_chloride, sucrose, trehalose, mannitol, "
            "sorbitol, glycerol or glucose; what the buffer and the drug leave is "
            "filled with it. Without an answer what is usual for such products is taken, "
            "mostly sodium chloride or a sugar.",
            readers.plain,
            None,
            tonic,
        ),
        Question(
            "excipient",
            "Which other excipients with an amount does it hold?",
            "Name, amount and unit, several separated by semicolons: sucrose 8 %; "
            "l_methionine 10 mmol/L. Only what dissolves in bulk matters here; "
            "surfactants and preservatives come as their own questions.",
            readers.excipients,
            open_line=None,
        ),
        Question(
            "loads.acid_mmol_l",
            "How much strong acid must it carry over its shelf life, mmol/L?",
            "Acid from degradation or the closure, best from a stability study without "
            "buffer. Carbon dioxide that the pack or the headspace lets in is counted "
            "for you. Without an answer a usual load is assumed and marked so.",
            readers.number_in("mmol/L"),
        ),
        Question(
            "loads.base_mmol_l",
            "How much strong base must it carry, mmol/L?",
            "Base from degradation or the drug. Alkali from glass is counted for you; if "
            "your study stood in the final glass, its drift holds that already: set "
            "container.count_alkali to false in the brief.",
            readers.number_in("mmol/L"),
        ),
        Question(
            "exclude",
            "Which buffers or ions must never be proposed?",
            "Names of species, systems or ions separated by blanks, for example "
            f"citrate potassium. Some of the species: {families}.",
            readers.names,
        ),
    ]
