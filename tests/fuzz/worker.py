"""Run broken inputs through the command line, in one process, and report what broke.

Started by the tests::

    python tests/fuzz/worker.py SEED COUNT FOLDER

Prints one JSON object: counts by kind and exit code, and every case that ended with a
traceback, an undocumented exit code, more than 5 s, or silence where an error was due.
"""

from __future__ import annotations

import contextlib
import io
import json
import os
import random
import resource
import shutil
import signal
import sys
import time
from collections import Counter
from collections.abc import Callable, Iterator
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parent))
import mutate

from formbuf.cli.main import run
from formbuf.library.loader import load_library

ROOT = Path(__file__).resolve().parent.parent.parent
EXAMPLES = sorted((ROOT / "examples").glob("*.toml"))
KNOWLEDGE = ROOT / "knowledge"
#: Exit code 4 says that our own tables are broken: nothing of a user leads there.
DOCUMENTED = {0, 1, 2, 3, 5}
#: Longest that a case may take [s of the processor], and wait for something [s].
LONGEST_S = 5
STUCK_S = 60
TITRATION = "ph,mmol_g\n" + "".join(
    f"{4 + 0.5 * i},{-0.2 + 0.1 * i:.2f}\n" for i in range(9)
)
LISTED = (
    "INGREDIENT_NAME,ROUTE,DOSAGE_FORM,CAS_NUMBER,UNII,POTENCY_AMOUNT,POTENCY_UNIT,"
    "MAXIMUM_DAILY_EXPOSURE,MAXIMUM_DAILY_EXPOSURE_UNIT\n"
    'HISTIDINE,SUBCUTANEOUS,"INJECTION, SOLUTION",71-00-1,,3.1,mg/1mL,NA,NA\n'
    '"SODIUM PHOSPHATE, DIBASIC",INTRAVENOUS,INJECTION,7558-79-4,,1.4,%w/v,NA,NA\n'
    "CITRIC ACID,ORAL,SOLUTION,77-92-9,,NA,NA,100,mg\n"
)
WORD_LIST = (
    "shortlist explain predict freeze-thaw batch-sheet challenge dilute retentate "
    "brief check schema new knowledge list show sources qualify rationale changes scan "
    "sensitivity guide --ph --route --store --form --drug-kind --drug-mg-ml --top --json "
    "--format --volume-ml --tonicity-agent --add --at --basis --amounts --system "
    "--concentration --to --nacl --sucrose --knowledge --precedent --help -h --version "
    "6.0 7.4 -40 1e999 nan csv table subcutaneous nasal frozen antibody sucrose=1 "
    "histidine_hydrochloride sodium_phosphate none 0 -1 10 molal g/L = -- - ''"
)
WORDS = WORD_LIST.split()
#: Options of the commands that compute without a brief, with values that may fit.
NUMBERS = (
    "0",
    "0.001",
    "1",
    "5",
    "20",
    "150",
    "900",
    "1e6",
    "-1",
    "-15",
    "7",
    "25",
    "nan",
)
MATERIALS = (
    "sucrose",
    "sodium_chloride",
    "hydrochloric_acid",
    "sodium_hydroxide",
    "l_histidine",
    "sodium_hydrogen_carbonate",
    "boric_acid",
    "calcium_chloride_dihydrate",
    "edetate_calcium_disodium_anhydrous",
    "NaCl",
    "sugar",
)
SYSTEMS = (
    "sodium_phosphate",
    "histidine_hydrochloride",
    "sodium_citrate",
    "sodium_bicarbonate",
    "sodium_borate",
    "tris_hydrochloride",
    "potassium_phosphate",
    "none",
    "histidine + acetate",
    "nothing",
)
NEEDED = ("--system", "--concentration", "--ph")
COMPUTING = {
    "predict": ("--add", "--at", "--basis", "--amounts", "--open-to-carbon-dioxide"),
    "freeze-thaw": ("--to", "--nacl", "--sucrose", "--trehalose", "--at"),
    "batch-sheet": ("--volume", "--prepare-at", "--assay", "--use", "--add"),
    "challenge": ("--added", "--to-ph", "--at", "--headspace", "--low", "--high"),
    "dilute": ("--into", "--fold", "--dose-ml", "--at", "--open"),
    "retentate": ("--charge", "--protein-mg-ml", "--molar-mass", "--at", "--add"),
}
FITTING = {
    "--to": "-15",
    "--at": "-5",
    "--volume": "10",
    "--assay": "98",
    "--to-ph": "6",
    "--low": "5",
    "--high": "9",
    "--fold": "10",
    "--molar-mass": "148000",
    "--protein-mg-ml": "100",
    "--prepare-at": "20",
}
#: Options that would write a file, ask questions or take long; left to other tests.
LEFT_OUT = {"-o", "--output", "--record", "--figure", "qualify", "scan", "sensitivity"}

Case = tuple[str, list[str]]


class HangError(Exception):
    """A case took longer than allowed."""


def cases(rng: random.Random, count: int, folder: Path) -> Iterator[Case]:
    """Yield kind and command line of each case; its files are written."""
    makers: tuple[tuple[int, Callable[[random.Random, Path], Case]], ...] = (
        (5, brief_bytes),
        (5, brief_values),
        (3, overlay),
        (2, listed),
        (2, titration),
        (2, line),
        (3, computing),
    )
    weighted = [maker for weight, maker in makers for _ in range(weight)]
    for number in range(count):
        yield weighted[number % len(weighted)](rng, folder)


def brief_bytes(rng: random.Random, folder: Path) -> Case:
    data = mutate.bytes_of(rng.choice(EXAMPLES).read_bytes(), rng)
    (folder / "brief.toml").write_bytes(data)
    return "brief, bytes", _brief_command(rng, folder)


def brief_values(rng: random.Random, folder: Path) -> Case:
    text = mutate.values_of(rng.choice(EXAMPLES).read_text("utf-8"), rng)
    (folder / "brief.toml").write_text(text, "utf-8", "surrogatepass")
    return "brief, values", _brief_command(rng, folder)


def _brief_command(rng: random.Random, folder: Path) -> list[str]:
    brief = str(folder / "brief.toml")
    way = rng.randint(0, 11)
    if way == 0:
        return ["shortlist", brief, "--json"]
    if way == 1:
        return [
            "shortlist",
            brief,
            "--format",
            rng.choice(("table", "csv", "markdown")),
        ]
    if way == 2:
        return ["explain", brief, rng.choice(("none", "sodium_phosphate", "xyz"))]
    return ["brief", "check", brief]


def overlay(rng: random.Random, folder: Path) -> Case:
    over = folder / "over"
    shutil.rmtree(over, ignore_errors=True)
    over.mkdir()
    load_library.cache_clear()
    for _ in range(rng.randint(1, 2)):
        source = rng.choice(
            [*sorted(KNOWLEDGE.rglob("*.csv")), *sorted(KNOWLEDGE.glob("*.toml")) * 3]
        )
        place = over / source.relative_to(KNOWLEDGE)
        place.parent.mkdir(exist_ok=True)
        lines = source.read_text("utf-8").split("\n")
        kept = (
            lines
            if source.suffix == ".toml"
            else [lines[0], *rng.sample(lines[1:-1], min(3, len(lines) - 2))]
        )
        text = "\n".join(kept) + "\n"
        if rng.random() < 0.5:
            place.write_bytes(mutate.bytes_of(text.encode(), rng))
        else:
            broken = (
                mutate.cells_of(text, rng)
                if source.suffix == ".csv"
                else mutate.values_of(text, rng)
            )
            place.write_text(broken, "utf-8", "surrogatepass")
    command = rng.choice(
        (
            ["knowledge", "list"],
            ["knowledge", "show", "species"],
            ["brief", "check", str(EXAMPLES[0])],
        )
    )
    if rng.randint(0, 9) == 0:
        command = ["shortlist", str(rng.choice(EXAMPLES)), "--json"]
    return "overlay", [*command, "--knowledge", str(over)]


def listed(rng: random.Random, folder: Path) -> Case:
    path = folder / "listed.csv"
    if rng.random() < 0.5:
        path.write_bytes(mutate.bytes_of(LISTED.encode(), rng))
    else:
        path.write_text(mutate.cells_of(LISTED, rng), "utf-8", "surrogatepass")
    brief = EXAMPLES[0] if rng.randint(0, 9) == 0 else folder / "no_such_brief.toml"
    if brief != EXAMPLES[0]:
        return "list of ingredients", ["--precedent", str(path)]
    return "list of ingredients", ["shortlist", str(brief), "--precedent", str(path)]


def titration(rng: random.Random, folder: Path) -> Case:
    path = folder / "titration.csv"
    if rng.random() < 0.5:
        path.write_bytes(mutate.bytes_of(TITRATION.encode(), rng))
    else:
        path.write_text(mutate.cells_of(TITRATION, rng), "utf-8", "surrogatepass")
    (folder / "titrated.toml").write_text(
        '[product]\nroute = "subcutaneous"\n[ph]\ntarget = 6.0\n[drug]\n'
        'kind = "antibody"\nconcentration_mg_ml = 50\nmolar_mass_g_mol = 148000\n'
        f'titration_file = "{path.name}"\n',
        "utf-8",
    )
    brief = str(folder / "titrated.toml")
    if rng.randint(0, 9) == 0:
        return "titration", ["shortlist", brief, "--json"]
    return "titration", ["brief", "check", brief]


def line(rng: random.Random, folder: Path) -> Case:
    words = [rng.choice(WORDS) for _ in range(rng.randint(0, 7))]
    if rng.random() < 0.3:
        words.insert(0, rng.choice(WORDS[:8]))
    if rng.random() < 0.2:
        junk = mutate.bytes_of(b"formbuf", rng).decode("utf-8", "surrogateescape")
        words.append(junk.replace("\0", ""))
    if rng.random() < 0.2:
        words.append(str(rng.choice(EXAMPLES)))
    return "command line", [w for w in words if w not in LEFT_OUT and w != "new"]


def computing(rng: random.Random, folder: Path) -> Case:
    name = rng.choice(sorted(COMPUTING))
    words = [name]
    if name != "predict" and rng.random() < 0.9:
        system = rng.choice(SYSTEMS if rng.random() < 0.3 else SYSTEMS[:7])
        amount = (
            rng.choice(NUMBERS) if rng.random() < 0.2 else f"{rng.uniform(1, 99):.3g}"
        )
        words += ["--system", system, "--concentration", amount]
        words += ["--ph", f"{rng.uniform(3, 10):.2f}"]
    for option in rng.sample(COMPUTING[name], rng.randint(1, len(COMPUTING[name]))):
        for _ in range(rng.choice((1, 1, 2))):
            words += [option, *_value(option, rng)]
    if rng.random() < 0.5:
        words.append("--json")
    return f"computing, {name}", words


def _value(option: str, rng: random.Random) -> list[str]:
    number, material = rng.choice(NUMBERS), rng.choice(MATERIALS)
    if rng.random() < 0.75:
        number = FITTING.get(option, "5")
        material = rng.choice(MATERIALS[:4])
    if option == "--open":
        return []
    if option in ("--add", "--assay"):
        return [f"{material}={number}"]
    words = {
        "--use": rng.choice(("disodium_hydrogen_phosphate_dihydrate", material)),
        "--into": rng.choice(("glucose_5", "sodium_chloride_0p9", "water", "tea")),
        "--basis": rng.choice(("molal", "solution", "moral")),
        "--amounts": rng.choice(("g/L", "mmol/L", "mmol/kg", "stone")),
    }
    return [words.get(option, number)]


def one(kind: str, args: list[str]) -> tuple[int, str]:
    """Run one case; return its exit code and what is wrong with how it ended."""
    out, err = io.StringIO(), io.StringIO()
    start = time.process_time()
    signal.setitimer(signal.ITIMER_REAL, STUCK_S)
    try:
        with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
            code = _run(kind, args)
    except HangError:
        return -1, f"hung for {STUCK_S} s"
    except BaseException as error:
        return -1, f"raised {type(error).__name__}: {error}"
    finally:
        signal.setitimer(signal.ITIMER_REAL, 0)
    spent = time.process_time() - start
    said = err.getvalue()
    if "Traceback" in said or code not in DOCUMENTED:
        return code, f"exit code {code}: {said[-1500:]}"
    if spent > LONGEST_S:
        return code, f"took {spent:.1f} s"
    if code > 1 and not said.strip():
        return code, "ended with an error code and said nothing"
    if code > 1 and out.getvalue() and "--json" in args:
        return code, "wrote data beside an error"
    return code, ""


def _run(kind: str, args: list[str]) -> int:
    if kind != "list of ingredients" or args[0] != "--precedent":
        return run(args)
    # reading the list is what is tried; a shortlist for each would take minutes
    from formbuf.cli.emit import say
    from formbuf.errors import FormbufError
    from formbuf.library.inactive_ingredients import with_precedent_file

    try:
        with_precedent_file(load_library(), Path(args[1]))
    except FormbufError as error:
        say(f"Error: {error.message}")
        return error.exit_code
    return 0


def main() -> None:
    seed, count, folder = int(sys.argv[1]), int(sys.argv[2]), Path(sys.argv[3])

    def hang(*_: object) -> None:
        raise HangError

    signal.signal(signal.SIGALRM, hang)
    rng = random.Random(seed)
    codes: dict[str, Counter[int]] = {}
    failures: list[dict[str, object]] = []
    slowest = 0.0
    for number, (kind, args) in enumerate(cases(rng, count, folder)):
        start = time.process_time()
        code, fault = one(kind, args)
        slowest = max(slowest, time.process_time() - start)
        codes.setdefault(kind, Counter())[code] += 1
        if fault:
            kept = folder / f"failure_{seed}_{number}"
            kept.mkdir()
            for name in ("brief.toml", "listed.csv", "titration.csv"):
                if (folder / name).exists():
                    shutil.copy(folder / name, kept)
            if (folder / "over").exists():
                shutil.copytree(folder / "over", kept / "over")
            failures.append(
                {"case": number, "kind": kind, "args": args, "fault": fault}
            )
            if len(failures) >= 20:
                break
    report = {
        "seed": seed,
        "cases": sum(sum(c.values()) for c in codes.values()),
        "codes": {kind: dict(sorted(c.items())) for kind, c in codes.items()},
        "slowest_s": round(slowest, 2),
        "memory_mb": resource.getrusage(resource.RUSAGE_SELF).ru_maxrss // 1024,
        "failures": failures,
    }
    os.write(1, json.dumps(report, ensure_ascii=True).encode())


if __name__ == "__main__":
    main()
