"""What the bench refuses: one clear message, exit 3 (exit 2 for usage)."""

from __future__ import annotations

from dataclasses import dataclass, field
from pathlib import Path

import pytest
from cli_runner import EXAMPLES, formbuf

ANTIBODY = str(EXAMPLES / "antibody.toml")
SYSTEM = ("--system", "sodium_phosphate")
QUICK = (*SYSTEM, "--concentration", "50", "--ph", "7.4")
SHEET = ("batch-sheet", *QUICK, "--volume", "2")
HEAD = (
    '[product]\nroute = "subcutaneous"\n[ph]\ntarget = 6.0\n[drug]\nkind = "protein"\n'
)
GIVEN = "concentration_mg_ml = 50\nmolar_mass_g_mol = 50000\n"


@dataclass(frozen=True)
class Bad:
    """A command line that cannot be, and what must be said about it."""

    name: str
    args: tuple[str, ...]
    words: tuple[str, ...]
    hint: str = ""
    code: int = 3
    brief: str = ""
    files: dict[str, str] = field(default_factory=dict)


def _sheet(name: str, *args: str, words: tuple[str, ...], hint: str = "") -> Bad:
    return Bad(name, (*SHEET, *args), words, hint)


def _brief(name: str, drug: str, *words: str, hint: str = "", **files: str) -> Bad:
    """A brief whose [drug] is wrong, from line 7 on."""
    args = ("batch-sheet", "BRIEF", *SYSTEM, "--volume", "1")
    return Bad(name, args, words, hint, brief=HEAD + drug, files=files)


BAD = [
    Bad(
        "ph_beyond_system",
        (
            "batch-sheet",
            "--system",
            "sodium_phosphate",
            "--concentration",
            "1",
            "--ph",
            "15",
            "--volume",
            "1",
        ),
        ("--ph", "15", "allowed 0 to 14"),
    ),
    Bad(
        "titrant_cannot_reach",
        (
            "batch-sheet",
            "--system",
            "tris_acetate",
            "--concentration",
            "10",
            "--ph",
            "1.0",
            "--volume",
            "1",
        ),
        ("tris acetate", "cannot be brought to pH 1.00", "acetic acid glacial"),
    ),
    _sheet("volume_zero", "--volume", "0", words=("--volume", "value 0 L")),
    _sheet("volume_minus", "--volume", "-2", words=("--volume", "value -2 L")),
    _sheet("volume_nan", "--volume", "nan", words=("--volume", "nan")),
    _sheet("volume_text", "--volume", "two", words=("--volume: must be a number",)),
    _sheet(
        "assay_above_100",
        "--assay",
        "sodium_hydroxide=101",
        words=("--assay", "sodium_hydroxide of 101 %", "allowed 0.1 to 100"),
    ),
    _sheet(
        "assay_of_nothing",
        "--assay",
        "natrium=99",
        words=("--assay", "unknown material 'natrium'"),
    ),
    _sheet(
        "assay_no_number",
        "--assay",
        "sodium_hydroxide=high",
        words=("--assay: must be a number", "'high'"),
    ),
    _sheet(
        "unknown_hydrate",
        "--use",
        "disodium_hydrogen_phosphate_trihydrate",
        words=("--use", "unknown material"),
        hint="disodium_hydrogen_phosphate",
    ),
    _sheet(
        "hydrate_of_another_material",
        "--use",
        "trehalose_dihydrate",
        words=("--use", "trehalose_dihydrate is no other hydrate"),
    ),
    _sheet(
        "unknown_grade",
        "--grade",
        "hydrochloric_acid=hydrochloric_acid_36",
        words=("--grade", "unknown grade"),
        hint="hydrochloric_acid_37",
    ),
    _sheet(
        "strength_zero",
        "--strength",
        "sodium_hydroxide=0",
        words=("--strength", "of 0 mol/L", "allowed"),
    ),
    _sheet("right_at_hot", "--right-at", "400", words=("temperature of 400 C",)),
    _sheet(
        "unknown_excipient",
        "--add",
        "manitol=50",
        words=("unknown material 'manitol'",),
        hint="mannitol",
    ),
    _sheet("excipient_minus", "--add", "mannitol=-50", words=("--add: mannitol=-50",)),
    _sheet(
        "agent_over_target",
        "--tonicity-agent",
        "sucrose",
        "--osmolality",
        "290",
        "--add",
        "calcium_edetate=1",
        words=("unknown material 'calcium_edetate'",),
    ),
    _sheet(
        "metal_complex",
        "--add",
        "edetate_calcium_disodium_anhydrous=1",
        words=("edetate_calcium_disodium_anhydrous", "not modelled"),
    ),
    _sheet(
        "store_hot", "--store", "300", words=("--store", "300", "allowed -20 to 121")
    ),
    Bad(
        "concentration_zero",
        ("batch-sheet", *SYSTEM, "--concentration", "0", "--ph", "7", "--volume", "1"),
        ("--concentration", "value 0", "allowed"),
    ),
    Bad(
        "unknown_system",
        (
            "batch-sheet",
            "--system",
            "sodium_phosphat",
            "--concentration",
            "5",
            "--ph",
            "7",
            "--volume",
            "1",
        ),
        ("unknown system 'sodium_phosphat'",),
        "sodium_phosphate",
    ),
    Bad(
        "species_for_system",
        (
            "batch-sheet",
            "--system",
            "phosphate",
            "--concentration",
            "5",
            "--ph",
            "7",
            "--volume",
            "1",
        ),
        ("'phosphate' is a species",),
        "sodium_phosphate",
    ),
    Bad(
        "half_a_pair",
        ("challenge", "--system", "histidine +", "--concentration", "5", "--ph", "6"),
        ("does not name two species",),
        "histidine + acetate",
    ),
    Bad("addition_huge", ("challenge", *QUICK, "--added", "1e9"), ("1e+09", "allowed")),
    Bad("to_ph_15", ("challenge", *QUICK, "--to-ph", "15"), ("pH 15", "0 to 14")),
    Bad("added_text", ("challenge", *QUICK, "--added", "1,5"), ("--added",), "a point"),
    Bad("at_hot", ("challenge", *QUICK, "--at", "200"), ("temperature of 200 C",)),
    Bad("headspace_minus", ("challenge", *QUICK, "--headspace", "-1"), ("ratio -1",)),
    Bad("gas_minus", ("challenge", *QUICK, "--carbon-dioxide", "-1"), ("-1 Pa",)),
    Bad(
        "window_outside",
        ("challenge", *QUICK, "--low", "7.6"),
        ("--low and --high", "does not hold the target pH 7.4"),
    ),
    Bad(
        "diluent_unknown",
        ("dilute", *QUICK, "--into", "sodium_chloride"),
        ("--into: unknown diluent",),
        "sodium_chloride_0p9",
    ),
    Bad(
        "fold_below_one",
        ("dilute", *QUICK, "--into", "glucose_5", "--fold", "0.5"),
        ("--fold", "0.5", "allowed 1"),
    ),
    Bad(
        "protein_too_much",
        (
            "retentate",
            *QUICK,
            "--charge",
            "5",
            "--protein-mg-ml",
            "900",
            "--molar-mass",
            "150000",
        ),
        ("--protein-mg-ml", "900", "allowed 0.001 to 500"),
    ),
    Bad(
        "protein_small",
        (
            "retentate",
            *QUICK,
            "--charge",
            "5",
            "--protein-mg-ml",
            "50",
            "--molar-mass",
            "150",
        ),
        ("--molar-mass", "150", "allowed 1000"),
    ),
    Bad(
        "retentate_without_charge",
        ("retentate", ANTIBODY, *SYSTEM),
        ("needs a protein with a known charge",),
        "net charge",
    ),
    _brief(
        "illegal_letter",
        GIVEN + '[[drug.chain]]\nsequence = "ACDXK"\n',
        "drug.chain[1].sequence (line 10)",
        "'X' at residue 4",
        "ACDEFGHIKLMNPQRSTVWY",
        hint="modified residues",
    ),
    _brief(
        "too_many_disulfides",
        GIVEN + 'disulfides = 3\n[[drug.chain]]\nsequence = "ACDCK"\n',
        "drug.disulfides (line 9)",
        "3 bonds need 6 cysteines",
        "allowed at most 1",
    ),
    _brief(
        "empty_sequence",
        GIVEN + '[[drug.chain]]\nsequence = " 12 "\n',
        "drug.chain[1].sequence",
        "holds no residues",
    ),
    _brief(
        "unknown_residue",
        GIVEN + "[drug.residues]\nserine = 5\n",
        "drug.residues.serine (line 10)",
        "is no group known here",
        "aspartate",
    ),
    _brief(
        "residues_without_molar_mass",
        "concentration_mg_ml = 50\n[drug.residues]\nlysine = 5\n",
        "molar_mass_g_mol",
        "residues counts moles",
    ),
    _brief(
        "charge_without_its_ph",
        GIVEN + "isoelectric_point = 8\nnet_charge = 5\n",
        "drug.net_charge",
        "without net_charge_ph",
    ),
    _brief(
        "charge_without_isoelectric_point",
        GIVEN + "net_charge = 5\nnet_charge_ph = 6\n",
        "drug.net_charge",
        "without isoelectric_point",
    ),
    _brief(
        "charge_on_the_wrong_side",
        GIVEN + "isoelectric_point = 8\nnet_charge = -5\nnet_charge_ph = 6\n",
        "net charge -5 at pH 6",
        "allowed positive below it",
    ),
    _brief(
        "titration_file_not_monotonic",
        GIVEN + 'titration_file = "curve.csv"\n',
        "drug.titration_file (line 9)",
        "curve.csv:4:mmol_g",
        "falls below 0.1",
        **{"curve.csv": "ph,mmol_g\n5,0\n6,0.1\n7,0.05\n"},
    ),
    _brief(
        "titration_file_missing_column",
        GIVEN + 'titration_file = "curve.csv"\n',
        "curve.csv:1:mmol_g",
        "column is missing",
        **{"curve.csv": "ph\n5\n6\n"},
    ),
    _brief(
        "titration_file_absent",
        GIVEN + 'titration_file = "none.csv"\n',
        "drug.titration_file (line 9)",
        "No such file",
        hint="folder of the brief",
    ),
    _brief(
        "titration_twice",
        GIVEN
        + 'titration_file = "c.csv"\n'
        + "".join(
            f"[[drug.titration]]\nph = {p}\nbase_mmol_l = {p}\n" for p in (5.0, 6.0)
        ),
        "drug.titration_file",
        "given beside [[drug.titration]]",
    ),
]
USAGE = [
    Bad(
        "volume_and_mass",
        (*SHEET, "--mass", "2"),
        ("--mass is given beside --volume",),
        code=2,
    ),
    Bad(
        "no_size",
        ("batch-sheet", *QUICK),
        ("neither --volume nor --mass is given",),
        code=2,
    ),
    Bad(
        "agent_without_target",
        (*SHEET, "--tonicity-agent", "sucrose"),
        ("--tonicity-agent is given without --osmolality",),
        code=2,
    ),
    Bad(
        "target_without_agent",
        ("challenge", *QUICK, "--osmolality", "290"),
        ("--osmolality is given without --tonicity-agent",),
        code=2,
    ),
    Bad(
        "nothing_but_a_system",
        ("batch-sheet", *SYSTEM, "--volume", "1"),
        ("no brief, and --concentration and --ph are not given",),
        code=2,
    ),
    Bad(
        "nothing_at_all",
        ("challenge",),
        ("no brief, and --system, --concentration and --ph are not given",),
        code=2,
    ),
    Bad("no_system", ("batch-sheet", ANTIBODY, "--volume", "1"), ("--system",), code=2),
    Bad(
        "no_ph",
        ("challenge", *SYSTEM, "--concentration", "5"),
        ("--ph is not",),
        code=2,
    ),
    Bad("nothing", ("dilute", *QUICK), ("--into",), code=2),
    Bad(
        "brief_and_options",
        ("batch-sheet", ANTIBODY, *SYSTEM, "--ph", "6", "--volume", "1"),
        ("--ph is given beside the brief",),
        code=2,
    ),
    Bad(
        "half_a_protein",
        ("retentate", *QUICK, "--charge", "5"),
        ("--protein-mg-ml and --molar-mass are not given",),
        code=2,
    ),
    Bad(
        "protein_and_brief",
        ("retentate", ANTIBODY, *SYSTEM, "--charge", "5"),
        ("--charge is given beside the brief",),
        code=2,
    ),
    _sheet("no_value", "--assay", "sodium_hydroxide", words=("--assay",)),
    Bad("figure", ("challenge", *QUICK, "--figure", "x.pdf"), ("--figure",), code=2),
]


@pytest.mark.parametrize("bad", [*BAD, *USAGE], ids=lambda bad: bad.name)
def test_one_message_and_the_exit_code(bad: Bad, tmp_path: Path) -> None:
    for name, text in bad.files.items():
        (tmp_path / name).write_text(text)
    brief = tmp_path / "brief.toml"
    brief.write_text(bad.brief)
    args = [str(brief) if arg == "BRIEF" else arg for arg in bad.args]
    done = formbuf(*args)

    assert done.code == (2 if bad.name == "no_value" else bad.code), done.err
    said = done.one_error()
    for word in bad.words:
        assert word in said
    if bad.hint:
        assert bad.hint in said.partition("\nHint: ")[2]


def test_there_are_enough() -> None:
    assert len(BAD) >= 30
    assert len({bad.name for bad in BAD}) == len(BAD)
