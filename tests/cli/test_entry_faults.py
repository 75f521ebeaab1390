"""Wrong entries of lists and tables of a brief: file, line, key, value, allowed, nearest."""

from __future__ import annotations

from pathlib import Path

import pytest
from cli_runner import formbuf

HEAD = '[product]\nroute = "subcutaneous"\n[ph]\ntarget = 6.0\n'  # lines 1 to 4
SIGNED = 'reason = "measured in a batch"\nname = "A"\ndate = 2026-01-01\n'
RULE = '[[override]]\nrule = "{}"\n' + SIGNED
MIX = '[[candidate]]\nname = "mix"\nmaterials = {citric_acid_monohydrate = 3}\n'
UNKNOWN_SYSTEM = '[[candidate]]\nsystem = "sodium_citrat"\nconcentration_mmol_l = 10\n'
ANCHOR = "[ranking.anchors.temperature_drift]\n"

#: Name, what follows the head, place, value, allowed, hint.
WRONG = [
    ("screen", RULE.format("ceilin"), "override[1].rule (line 6)", "'ceilin'",
     "ph_window", "'ceiling'"),
    ("rule", RULE.format("R999"), "override[1].rule (line 6)", "'R999'",
     "an id of rules.csv", "'R099'"),
    ("rule_case", RULE.format("r041"), "override[1].rule (line 6)", "'r041'",
     "an id of rules.csv", "'R041'"),
    ("rule_twice", RULE.format("R041") * 2, "override[2].rule (line 11)", "'R041'",
     "allowed once", ""),
    ("override_system", RULE.format("R041") + 'system = "sodium_citrat"\n',
     "override[1].system (line 10)", "'sodium_citrat'", "a system", "'sodium_citrate'"),
    ("formula_twice", MIX * 2, "candidate[2].name (line 9)", "'mix'",
     "a name of its own", ""),
    ("formula_system", UNKNOWN_SYSTEM, "candidate[1].system (line 6)", "'sodium_citrat'",
     "a system", "'sodium_citrate'"),
    ("excipient", '[[excipient]]\nmaterial = "sucros"\nmmol_l = 1\n',
     "excipient[1].material (line 6)", "'sucros'", "id, formula or name", "'sucrose'"),
    ("excipient_amounts", '[[excipient]]\nmaterial = "sucrose"\nmmol_l = 1\ng_l = 3\n',
     "excipient[1].g_l (line 8)", "value 3", "exactly one of", ""),
    ("weight", "[ranking.weights]\ncapacty = 2\n", "ranking.weights.capacty (line 6)",
     "'capacty'", "capacity, compatibility", "'capacity'"),
    ("floor_below_full", ANCHOR + "full = 0.5\nfloor = 0.1\n",
     "temperature_drift.floor (line 7)", "value 0.1", "above full, 0.5", ""),
    ("full_above_our_floor", ANCHOR + "full = 5\n",
     "temperature_drift.full (line 6)", "value 5", "below floor, 0.8", ""),
    ("fact_name", "[facts]\ncalcium_mmoll = 2\n", "facts.calcium_mmoll (line 6)",
     "value 2", "a fact that a rule tests", "'calcium_mmol_l'"),
    ("fact_text", '[facts]\ncalcium_mmol_l = "much"\n', "facts.calcium_mmol_l (line 6)",
     "'much'", "a number from 0 to 5000 (mmol/L)", ""),
    ("fact_range", "[facts]\ncalcium_mmol_l = -2\n", "facts.calcium_mmol_l (line 6)",
     "value -2", "a number from 0 to 5000 (mmol/L)", ""),
    ("fact_yes", '[facts]\nlight_exposed = "ja"\n', "facts.light_exposed (line 6)",
     "'ja'", "true or false", ""),
    ("fact_choice", '[facts]\ninsoluble_drug_salts = ["citrate", "phosphat"]\n',
     "facts.insoluble_drug_salts (line 6)", "'phosphat'", "phosphate, citrate",
     "'phosphate'"),
    ("fact_elsewhere", '[facts]\nroute = "oral"\n', "facts.route (line 6)", "'oral'",
     "allowed only there", ""),
    ("drug_group", '[drug]\ngroups = ["beta_lactams"]\n', "drug.groups[1] (line 6)",
     "'beta_lactams'", "allowed", "'beta_lactam'"),
]  # fmt: skip


@pytest.mark.parametrize(
    ("text", "place", "value", "allowed", "hint"),
    [row[1:] for row in WRONG],
    ids=[row[0] for row in WRONG],
)
@pytest.mark.parametrize("command", [("shortlist",), ("brief", "check")], ids=" ".join)
def test_an_entry_is_told_with_its_place(
    command: tuple[str, ...],
    text: str,
    place: str,
    value: str,
    allowed: str,
    hint: str,
    tmp_path: Path,
) -> None:
    path = tmp_path / "wrong.toml"
    path.write_text(HEAD + text)
    done = formbuf(*command, str(path))
    assert done.code == 3, done.err
    said, _, hints = done.one_error().partition("\nHint: ")
    assert said.startswith(f"Error: {path}: ")
    assert place in said
    assert value in said
    assert "allowed" in said
    assert allowed in said
    assert hint in hints


def test_sound_entries_pass(tmp_path: Path) -> None:
    path = tmp_path / "sound.toml"
    facts = '[facts]\ncalcium_mmol_l = "unknown"\ninsoluble_drug_salts = "none"\n'
    anchor = ANCHOR + "full = 0.1\nfloor = 0.3\n"
    path.write_text(HEAD + RULE.format("ceiling") + MIX + facts + anchor)
    done = formbuf("brief", "check", str(path))
    assert done.code == 0, done.err


def test_ends_are_compared_with_those_of_the_route(tmp_path: Path) -> None:
    """Tonicity share: full 0.03, or 0.5 where the buffer may be the vehicle (ours)."""
    codes = {}
    for route in ("subcutaneous", "nasal"):
        path = tmp_path / f"{route}.toml"
        text = HEAD.replace("subcutaneous", route)
        path.write_text(text + "[ranking.anchors.tonicity_share]\nfloor = 0.3\n")
        done = formbuf("brief", "check", str(path))
        codes[route] = done.code
        assert ("above full, 0.5" in done.err) == (route == "nasal")
    assert codes == {"subcutaneous": 0, "nasal": 3}
