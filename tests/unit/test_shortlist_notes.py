"""What a shortlist says of itself: overlays, agents that buffer, what keeps a species."""

from __future__ import annotations

import csv
import tomllib
from collections.abc import Mapping
from pathlib import Path
from typing import Any

import pytest
from cli_runner import formbuf

from formbuf import load_library, shortlist
from formbuf.advice.results import Candidate, Shortlist
from formbuf.bench.knowledge_audit import table_schemas
from formbuf.bench.setup import bench_from_options
from formbuf.library import Library
from formbuf.library.store import knowledge_root
from formbuf.output.serialise import header, shortlist_dict
from formbuf.output.shortlist_page import blocks, open_alike
from formbuf.output.words import standing_words
from formbuf.product.brief import brief_from_mapping
from formbuf.product.overlay_changes import (
    _key_columns,
    overlay_changes,
    overlay_notice,
)

LIBRARY = load_library()
HEAD: dict[str, Any] = {
    "product": {"route": "subcutaneous", "form": "liquid"},
    "ph": {"target": 6.0},
}
MOLECULE: dict[str, Any] = {"kind": "small_molecule", "groups": []}


def run(library: Library = LIBRARY, **tables: Any) -> Shortlist:
    return shortlist(brief_from_mapping({**HEAD, **tables}), library)


def judged(result: Shortlist, key: str) -> Candidate:
    found = result.candidate(key)
    assert found is not None
    return found


def rows_of(name: str) -> tuple[list[str], list[dict[str, str]]]:
    text = (Path(str(knowledge_root())) / name).read_text(encoding="utf-8")
    reader = csv.DictReader(text.splitlines())
    return list(reader.fieldnames or ()), list(reader)


def overlay(folder: Path, name: str, rows: list[Mapping[str, str]]) -> None:
    folder.mkdir(exist_ok=True)
    columns, _ = rows_of(name)
    with (folder / name).open("w", encoding="utf-8", newline="") as file:
        writer = csv.DictWriter(file, columns, restval="")
        writer.writeheader()
        writer.writerows(rows)


# -- beta-lactams ------------------------------------------------------------------


@pytest.mark.parametrize(("form", "dropped"), [("liquid", True), ("dried", False)])
def test_histidine_is_no_buffer_for_a_beta_lactam_in_solution(
    form: str, dropped: bool
) -> None:
    """Imidazole turns penicillins to penicillenic acids: Bundgaard 1971 (memory)."""
    result = run(
        product={"route": "intravenous", "form": form},
        drug={"kind": "small_molecule", "groups": ["beta_lactam"]},
    )
    reasons = {s.id for s in judged(result, "histidine_hydrochloride").dropped_by}
    assert ("R132" in reasons) is dropped
    # the mild catalysts are lowered, not dropped
    citrate = judged(result, "sodium_citrate")
    assert "R132" not in {s.id for s in citrate.dropped_by}


def test_a_molecule_without_a_lactam_keeps_histidine() -> None:
    drug = {"kind": "small_molecule", "groups": ["ester"]}
    assert not judged(run(drug=drug), "histidine_hydrochloride").dropped_by


# -- rules that stay open ----------------------------------------------------------


def test_a_rule_open_for_all_is_asked_once_and_not_repeated_by_candidate() -> None:
    result = run(drug={"kind": "small_molecule"})
    groups = next(m for m in result.missing_facts if m.fact.name == "drug_groups")
    assert {"R061", "R049"} <= set(groups.rules)
    assert groups.could_exclude
    # R061 concerns any buffer, R049 amines only
    assert "R061" in open_alike(result)
    assert "R049" not in open_alike(result)
    text = " ".join(str(block) for block in blocks(result))
    assert "R061" not in text
    assert any(f.rule == "R061" for f in result.heads[0].findings)


def test_an_empty_list_of_groups_says_that_there_are_none() -> None:
    result = run(drug=MOLECULE)
    assert result.brief.drug.groups == ("none",)
    same = run(drug={**MOLECULE, "groups": ["none"]})
    assert same.verdict == result.verdict
    assert same.missing_facts == result.missing_facts
    assert run(drug={"kind": "small_molecule"}).brief.drug.groups == ()


def test_the_groups_once_stated_settle_it() -> None:
    result = run(drug=MOLECULE)
    assert "drug_groups" not in {m.fact.name for m in result.missing_facts}
    verdicts = {f.outcome for c in result.heads for f in c.findings if f.rule == "R061"}
    assert verdicts == {"not fired"}


def test_the_kind_of_drug_is_asked_before_its_groups() -> None:
    result = run()
    first = result.missing_facts[0]
    assert first.fact.name == "drug_kind"
    assert first.could_exclude
    assert "R061" in first.rules
    assert "drug_groups" not in {m.fact.name for m in result.missing_facts}
    told = run(drug={"kind": "antibody"})
    verdicts = {f.outcome for c in told.heads for f in c.findings if f.rule == "R061"}
    assert verdicts == {"not fired"}


# -- overlays ----------------------------------------------------------------------


def precedent_overlay(folder: Path) -> Library:
    """One row repeated, one changed, one added."""
    _, rows = rows_of("precedent.csv")
    by_key = {(row["species"], row["route"]): row for row in rows}
    same = by_key["histidine", "subcutaneous"]
    tris = {**by_key["tris", "subcutaneous"], "ceiling_mmol_l": "12"}
    tris["usual_high_mmol_l"] = "10"
    same = {**same, "ceiling_mmol_l": f"{float(same['ceiling_mmol_l']):.2f}"}
    new = {**by_key["tris", "subcutaneous"], "route": "intra_articular"}
    overlay(folder, "precedent.csv", [same, tris, new])
    return load_library(folder)


def test_an_overlay_of_precedents_is_named_with_what_it_changes(tmp_path: Path) -> None:
    own = precedent_overlay(tmp_path / "own")
    said = (
        f"tables of {own.overlay} lie over those of the installation: precedent.csv "
        "(1 row changed, 1 row added)"
    )
    assert overlay_notice(own) == said
    result = run(own, drug=MOLECULE)
    assert result.warnings.count(said) == 1
    assert any(said in str(block) for block in blocks(result))
    data = shortlist_dict(result)
    assert said in data["warnings"]
    changes = [{"table": "precedent.csv", "changed": 1, "added": 1}]
    assert data["knowledge"]["overlay_changes"] == changes
    # and it does change a screen
    assert judged(result, "tris_hydrochloride").ceiling_mmol_l == 12.0
    assert judged(run(drug=MOLECULE), "tris_hydrochloride").ceiling_mmol_l != 12.0


def test_commands_without_a_brief_name_the_overlay_too(tmp_path: Path) -> None:
    own = precedent_overlay(tmp_path / "own")
    system = own.get_system("tris_hydrochloride")
    bench = bench_from_options(own, system, concentration_mmol_l=10.0, ph=8.0)
    assert bench.notes == (overlay_notice(own),)
    plain = bench_from_options(LIBRARY, system, concentration_mmol_l=10.0, ph=8.0)
    assert plain.notes == ()


@pytest.mark.parametrize(
    "command",
    [
        "predict --add sucrose=100",
        pytest.param(
            "sensitivity examples/antibody.toml --reach 0.1", marks=pytest.mark.slow
        ),
        "freeze-thaw --system sodium_phosphate --concentration 50 --ph 7.4 --to -10",
    ],
)
def test_pages_without_a_shortlist_name_the_overlay_too(
    command: str, tmp_path: Path
) -> None:
    precedent_overlay(tmp_path / "own")
    own = ("--knowledge", str(tmp_path / "own"))
    said = "lie over those of the installation: precedent.csv (1 row changed, 1 row"
    if not command.startswith("sensitivity"):  # half a minute each
        table = formbuf(*command.split(), *own)
        assert said in " ".join(table.out.split())
    changes = [{"table": "precedent.csv", "changed": 1, "added": 1}]
    data = formbuf(*command.split(), *own, "--json").data()  # the same in JSON
    assert data["knowledge"]["overlay_changes"] == changes


def test_without_an_overlay_nothing_is_said() -> None:
    assert overlay_notice(LIBRARY) == ""
    assert overlay_changes(LIBRARY) == ()
    assert header("formbuf.shortlist/1", LIBRARY)["knowledge"]["overlay_changes"] == []
    assert not any("lie over" in warning for warning in run().warnings)


def test_settings_of_an_overlay_are_counted(tmp_path: Path) -> None:
    root = Path(str(knowledge_root()))
    weights = tomllib.loads((root / "criteria.toml").read_text())["weights"]
    name, other = list(weights)[:2]
    text = f"[weights]\n{name} = {weights[name] + 1}\n{other} = {weights[other]}\n"
    (tmp_path / "criteria.toml").write_text(text)
    own = load_library(tmp_path)
    assert overlay_notice(own).endswith("criteria.toml (1 setting changed)")


def test_a_copy_of_a_table_changes_nothing(tmp_path: Path) -> None:
    for name in ("precedent.csv", "osmotic.csv", "solubilities.csv", "rules.csv"):
        overlay(tmp_path, name, list(rows_of(name)[1]))
    changes = overlay_changes(load_library(tmp_path))
    assert [(c.changed, c.added) for c in changes] == [(0, 0)] * 4


def test_rows_are_told_apart_by_the_key_of_each_table() -> None:
    for name, schema in table_schemas().items():
        columns, _ = rows_of(name)
        assert _key_columns(name, columns) == schema.key, name


# -- a tonicity agent that buffers -------------------------------------------------


def agent_words(result: Shortlist) -> list[str]:
    return [w for w in result.warnings if "buffers at the target pH itself" in w]


def test_glycine_near_its_pk_is_named_with_its_share() -> None:
    """Glycine, pK 9.78 (Goldberg 2002), at pH 8.8 and some 250 mmol/L."""
    result = run(ph={"target": 8.8}, drug=MOLECULE, tonicity={"agent": "glycine"})
    (said,) = agent_words(result)
    assert "glycine with pK 9.78" in said
    lead = result.lead
    assert lead is not None
    share = float(said.rpartition(" it has ")[2].partition(" %")[0])
    print(f"{lead.name}: {share} % of the capacity is the agent's")
    # by hand: 2.303 c Ka h / (Ka + h)^2 of 256 mmol/L at a pK near 9.6 is some 60
    assert lead.tonicity_fill is not None
    state = lead.state_at("measure")
    assert state is not None
    h, ka = 10**-8.8, 10**-9.7
    by_hand = 2.303 * lead.tonicity_fill.mmol_l * ka * h / (ka + h) ** 2
    assert share / 100 * state.capacity_mmol_l_ph == pytest.approx(by_hand, rel=0.25)
    assert 50 < share < 100


@pytest.mark.parametrize(
    ("agent", "ph", "named"),
    [
        ("glycine", 6.0, False),
        ("sodium_chloride", 8.8, False),
        ("mannitol", 6.0, False),
        ("l_arginine_hydrochloride", 6.0, False),
        ("l_arginine_hydrochloride", 8.2, True),
    ],
)
def test_only_an_agent_with_a_pk_near_the_target_is_named(
    agent: str, ph: float, named: bool
) -> None:
    result = run(ph={"target": ph}, drug=MOLECULE, tonicity={"agent": agent})
    assert bool(agent_words(result)) is named


# -- what keeps an in-house species ------------------------------------------------

OWN: dict[str, Any] = {
    "species": [
        {
            "id": "own_amine",
            "source": "own report",
            "step": [{"pka": 6.1, "acid_charge": 1, "dh_kj_mol": 30.0}],
        }
    ],
    "material": [
        {
            "id": "own_amine_base",
            "contents": {"own_amine": 1},
            "molar_mass_g_mol": 120.0,
            "source": "own report",
        }
    ],
    "system": [
        {
            "id": "own_buffer",
            "species": ["own_amine"],
            "base_material": "own_amine_base",
        }
    ],
}


def no_precedent(result: Shortlist) -> list[str]:
    found = judged(result, "own_buffer").screens
    return [s.text for s in found if s.id == "no_precedent" and not s.overridden_by]


def test_an_in_house_species_says_what_keeps_it_and_that_keeps_it() -> None:
    (said,) = no_precedent(run(drug=MOLECULE, **OWN))
    assert '[[override]] with rule = "no_precedent", system = "own_buffer"' in said
    override = {
        "rule": "no_precedent",
        "system": "own_buffer",
        "reason": "toxicology package 12",
        "name": "A. Person",
        "date": "2026-05-01",
    }
    kept = run(drug=MOLECULE, override=[override], **OWN)
    assert no_precedent(kept) == []


def test_a_row_of_precedent_in_an_overlay_keeps_it_as_the_message_says(
    tmp_path: Path,
) -> None:
    (said,) = no_precedent(run(drug=MOLECULE, **OWN))
    assert "a row own_amine, subcutaneous in precedent.csv" in said
    assert "--knowledge" in said
    overlay(
        tmp_path,
        "precedent.csv",
        [
            {
                "species": "own_amine",
                "route": "subcutaneous",
                "level": "limited",
                "reason": "own product",
                "level_basis": "practice",
                "usp_nf": "no",
                "ph_eur": "no",
                "jp": "no",
                "monograph_basis": "practice",
            }
        ],
    )
    species = {"id": "own_amine", "name": "own", "family": "amine or amino acid"}
    overlay(tmp_path, "species.csv", [{**species, "candidate": "yes"}])
    step = {"species": "own_amine", "step": "1", "acid_charge": "1", "pka": "6.1"}
    basis = {"pka_basis": "judgement", "uncertainty_basis": "judgement"}
    step |= {"pka_uncertainty": "0.05", **basis}
    overlay(tmp_path, "ionization.csv", [step])
    tables = {key: OWN[key] for key in ("material", "system")}
    own = load_library(tmp_path)
    assert no_precedent(run(own, drug=MOLECULE, **tables)) == []


def test_a_species_of_the_tables_needs_no_such_words() -> None:
    result = run(drug=MOLECULE, ph={"target": 8.0}, require=["glycylglycine+tris"])
    texts = [
        s.text for c in result.dropped for s in c.screens if s.id == "no_precedent"
    ]
    assert texts
    assert not any("in-house" in text for text in texts)


# -- the verdict where no buffer is left -------------------------------------------

BUFFERS = sorted(
    {n for s in LIBRARY.systems.values() if s.role == "buffer" for n in s.species}
)


def test_a_product_that_stands_without_a_buffer_leads_the_verdict() -> None:
    drug = {
        **MOLECULE,
        "concentration_mg_ml": 20.0,
        "molar_mass_g_mol": 200.0,
        "counter_ion": "chloride",
        "pka": [{"pka": 6.0, "acid_charge": 1}],
    }
    result = run(drug=drug, exclude=BUFFERS)
    bare = judged(result, "none")
    assert bare.standing in ("viable", "back-up")
    assert result.verdict.startswith(
        "No added buffer stays viable: the product by itself"
    )
    assert "; to be confirmed by a titration. Every buffer" in result.verdict
    assert standing_words(bare).startswith("enough by calculation")
    dropped = [c for c in result.dropped if c.system.id != "none"]
    held = sum("excluded" in {s.id for s in c.dropped_by} for c in dropped)
    assert held == len(dropped) > 5
    assert result.verdict.endswith(
        "Every buffer system is screened out, most often by excluded "
        f"({held} of {len(dropped)})."
    )
    data = shortlist_dict(result)
    assert data["verdict"] == result.verdict
    assert data["lead"] is None


def test_a_product_of_which_nothing_is_known_is_open() -> None:
    result = run(drug={"kind": "small_molecule"}, exclude=BUFFERS)
    assert result.verdict.startswith("No buffer is acceptable: every buffer system")
    assert "Whether the product stands without one is open" in result.verdict
    assert "viable" not in result.verdict


def test_a_product_that_carries_too_little_is_not_called_viable() -> None:
    drug = {
        **MOLECULE,
        "concentration_mg_ml": 0.02,
        "molar_mass_g_mol": 200.0,
        "counter_ion": "chloride",
        "pka": [{"pka": 6.0, "acid_charge": 1}],
    }
    result = run(drug=drug, exclude=BUFFERS)
    bare = judged(result, "none")
    assert bare.carried_share is not None
    assert 0.0 < bare.carried_share < 1.0
    assert result.verdict.startswith("No buffer is acceptable: every buffer system")
    assert (
        "Nor is the product enough without one: the product by itself" in result.verdict
    )
    assert "viable" not in result.verdict
    assert standing_words(bare) == "not enough by itself"


def test_a_protein_that_cannot_be_judged_without_one_is_not_called_viable() -> None:
    result = run(drug={"kind": "antibody"}, exclude=BUFFERS)
    assert result.verdict.startswith("No buffer is acceptable: every buffer system")
    assert "Whether the product stands without one is open: what" in result.verdict
    assert "viable" not in result.verdict
