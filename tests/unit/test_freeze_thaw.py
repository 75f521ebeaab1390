"""Freezing and thawing of compositions and of briefs: bounds, evidence, words, figure.

Published values are those of Gomez, Pikal & Rodriguez-Hornedo 2001 (Pharm. Res. 18,
90) and van den Berg & Rose 1959 (Arch. Biochem. Biophys. 81, 319), as the tables hold
them.
"""

from __future__ import annotations

import json
import time
from functools import cache
from xml.etree import ElementTree as ET

import pytest

from formbuf.advice import frozen
from formbuf.advice.freeze_thaw import compare_freezing, freeze_composition
from formbuf.advice.freeze_thaw_evidence import (
    RankedObservation,
    observed_change,
    published_change,
    verdict,
)
from formbuf.advice.freeze_thaw_results import (
    FreezeThaw,
    FreezeThawSystem,
    QuickQuestion,
)
from formbuf.advice.shortlist import shortlist
from formbuf.chemistry.freezing_records import FreezingPath
from formbuf.errors import ConvergenceError, InputError, UnknownNameError
from formbuf.library import Library, load_library
from formbuf.output import freeze_thaw_figure as drawing
from formbuf.output import freeze_thaw_observed as observed
from formbuf.output.freeze_thaw_data import freeze_thaw_dict, records
from formbuf.output.freeze_thaw_page import freeze_thaw_page
from formbuf.output.freeze_thaw_words import class_words, range_words, title_of
from formbuf.output.page import Grid, Heading
from formbuf.output.writers import render
from formbuf.product.brief import brief_from_mapping
from formbuf.product.freezing_assess import NEGLIGIBLE_BELOW
from formbuf.product.freezing_data import Observation

SALT = {"--nacl": ("sodium_chloride", "mmol_l", 150.0)}
SUGAR = {"--sucrose": ("sucrose", "percent_w_v", 5.0)}
Added = dict[str, tuple[str, str, float]]


@cache
def _library() -> Library:
    return load_library()


def _freeze(
    system: str = "sodium_phosphate",
    mmol_l: float = 50.0,
    ph: float = 7.4,
    to_c: float = -10.0,
    added: Added | None = None,
    at_c: tuple[float, ...] = (),
) -> FreezeThaw:
    question = QuickQuestion(system, mmol_l, ph, to_c, added or {})
    return freeze_composition(question, _library(), at_c=at_c)


@cache
def _phosphate(mmol_l: float = 50.0, ph: float = 7.4) -> FreezeThaw:
    return _freeze(mmol_l=mmol_l, ph=ph)


@cache
def _brief(form: str = "frozen", ph: float = 7.4, kind: str = "none") -> FreezeThaw:
    data = {
        "product": {"route": "intravenous", "form": form},
        "ph": {"target": ph},
        "drug": {"kind": kind},
        "tonicity": {"agent": "sodium_chloride"},
    }
    return compare_freezing(brief_from_mapping(data), _library())


def _only(result: FreezeThaw) -> FreezeThawSystem:
    (one,) = result.systems
    return one


def _ph_at(path: FreezingPath, temperature_c: float) -> float:
    """PH of a path, metastable where no liquid is left at equilibrium."""
    for point in (*path.metastable, *path.points):
        if abs(point.temperature_c - temperature_c) < 1e-9 and point.ph is not None:
            return point.ph
    msg = f"no pH at {temperature_c}"
    raise AssertionError(msg)


def test_what_was_measured_lies_between_the_bounds() -> None:
    """Gomez 2001 (4.2 at 50 and 100 mmol/L, -10 C); van den Berg 1959 (3.6, -9.9 C)."""
    result = _freeze(at_c=(-9.9,))
    s = _only(result)
    crystallising, supersaturated = s.frozen.assessment.paths
    assert crystallising.error_ph is not None
    checked = 0
    for ranked in s.observations:
        numbers = ranked.observation.numbers
        at = numbers.get("temperature_frozen_c")
        if not ranked.alike or at is None or ranked.observation.basis != "published":
            continue
        low, high = _ph_at(crystallising, at), _ph_at(supersaturated, at)
        print(ranked.observation.id, at, low, numbers["ph_frozen"], high)
        assert low - crystallising.error_ph <= numbers["ph_frozen"] <= high
        checked += 1
    assert checked == 3


def test_a_dilute_buffer_was_measured_between_the_bounds_too() -> None:
    """Gomez 2001: 5.2 at -10 C for 8 mmol/L, pH 7.4."""
    crystallising, supersaturated = _only(_phosphate(8.0)).frozen.assessment.paths
    assert _ph_at(crystallising, -10.0) < 5.2 < _ph_at(supersaturated, -10.0)


def test_observations_stand_nearest_first() -> None:
    names = [r.observation.id for r in _only(_phosphate()).observations]
    assert names[:2] == ["gomez_50_74", "gomez_100_74"]
    acid = _only(_freeze(mmol_l=8.0, ph=5.7)).observations
    assert acid[0].observation.id == "gomez_8_57"
    distances = [r.distance for r in acid]
    assert distances == sorted(distances)
    assert acid[0].distance == pytest.approx(0.0)


def test_sugar_and_salt_bring_their_own_observations_forward() -> None:
    def place(name: str, added: Added) -> int:
        seen = _only(_freeze(mmol_l=15.0, added=added)).observations
        return [r.observation.id for r in seen].index(name)

    assert place("thorat_pbs_sugar", {**SALT, **SUGAR}) < place("thorat_pbs_sugar", {})
    assert place("thorat_pbs", SALT) < place("thorat_pbs", {})
    plain = _only(_freeze(mmol_l=15.0)).observations
    salted = _only(_freeze(mmol_l=15.0, added=SALT)).observations

    def alike(seen: tuple[RankedObservation, ...]) -> set[str]:
        return {r.observation.id for r in seen if r.alike}

    assert "gomez_8_74" in alike(plain)
    assert "gomez_8_74" not in alike(salted)
    assert "thorat_pbs" in alike(salted)


def test_two_species_have_the_observations_of_each() -> None:
    seen = _only(_freeze("tris_acetate", 10.0, 8.0)).observations
    systems = {name for r in seen for name in r.observation.systems}
    assert "tris_hydrochloride" in systems
    assert "sodium_phosphate" not in systems


@pytest.mark.parametrize(
    ("mmol_l", "added", "words"),
    [
        (50.0, {}, "near the crystallising path on slow cooling"),
        (20.0, {}, "nearer the crystallising one on slow cooling"),
        (8.0, {}, "below 10 mmol/L crystallisation is slow"),
        (50.0, SUGAR, "near the supersaturated path: an amorphous sugar"),
    ],
)
def test_where_real_samples_fall_follows_the_rule(
    mmol_l: float, added: Added, words: str
) -> None:
    """Gomez 2001 (concentration), Croyle 1998 (sugar); the limits are judgement."""
    s = _only(_freeze(mmol_l=mmol_l, added=added, to_c=-20.0))
    assert words in s.where
    assert set(s.where_sources) == {"gomez_2001", "croyle_1998", "murase_franks_1989"}


def test_the_rule_of_sodium_is_not_told_of_potassium() -> None:
    """Murase & Franks 1989: potassium phosphate is the more stable one."""
    s = _only(_freeze("potassium_phosphate", 50.0, 7.0, -20.0))
    assert "sluggishly" in s.where
    assert "gomez_2001" not in s.where_sources


def test_where_says_so_if_nothing_can_crystallise_or_freeze() -> None:
    dilute = _only(_freeze(mmol_l=5.0, ph=4.5, to_c=-1.0))
    assert dilute.where == "on the path: no salt reaches its solubility down to -1 C"
    warm = _only(_freeze(to_c=-0.1))
    assert warm.where == "no ice forms at the temperatures asked for"
    assert warm.frozen.counted_class == "negligible"
    assert warm.thaw == "nothing to thaw"


def test_no_solid_is_named_whose_ions_are_absent() -> None:
    """Histidine acetate holds no sodium, so no sodium acetate can crystallise."""
    alone = _only(_freeze("histidine_acetate", 20.0, 6.0))
    assert "CH3COONa" not in alone.where + alone.thaw
    salted = _only(_freeze("sodium_acetate", 20.0, 5.0))
    assert "CH3COONa.3H2O" in salted.where


def test_the_first_melt_is_acid_where_a_basic_salt_dissolves_late() -> None:
    assert "the first melt is acid" in _only(_phosphate()).thaw
    potassium = _only(_freeze("potassium_phosphate", 50.0, 7.0, -13.0))
    assert "acid salt (KH2PO4)" in potassium.thaw
    assert "the first melt is basic" in potassium.thaw
    assert "nothing" in _only(_freeze("histidine_hydrochloride", 10.0, 6.0)).thaw


def test_the_shift_counts_the_last_liquid() -> None:
    """The last liquid stands at the eutectic, between the temperatures asked for."""
    found = _only(_phosphate()).frozen.assessment
    last = found.paths[0].event("eutectic")
    assert last is not None
    assert last.ph is not None
    assert found.freezing_shift is not None
    assert found.cooling_shift is not None
    calm = found.paths[0].ph_prepared + found.cooling_shift
    assert calm + found.freezing_shift == pytest.approx(last.ph, abs=1e-9)
    drawn = [p.ph - calm for p in found.paths[0].points if p.ph is not None]
    assert min(drawn) > found.freezing_shift


def test_concentration_sets_the_onset_not_the_path() -> None:
    """With ice and one salt the brine is invariant (phase rule)."""
    paths = [_only(_phosphate(c)).frozen.assessment.paths[0] for c in (50.0, 100.0)]
    assert _ph_at(paths[0], -5.0) == pytest.approx(_ph_at(paths[1], -5.0), abs=0.02)
    onsets = [path.event("onset") for path in paths]
    assert onsets[0] is not None
    assert onsets[1] is not None
    assert onsets[0].temperature_c < onsets[1].temperature_c


def test_potassium_alone_is_not_counted_as_sodium() -> None:
    """The quick form states its contents in full."""
    alone = _only(_freeze("potassium_phosphate", 50.0, 7.4, -20.0)).frozen
    assert alone.remark == ""
    assert alone.counted_class == alone.assessment.freezing_class
    salted = _only(_freeze("potassium_phosphate", 50.0, 7.4, -20.0, SALT)).frozen
    assert salted.counted_class == "severe"


def test_a_sugar_eases_the_class_and_says_so() -> None:
    s = _only(_freeze(mmol_l=10.0, to_c=-20.0, added=SUGAR))
    assert s.frozen.assessment.freezing_class == "severe"
    assert s.frozen.counted_class == "moderate"
    assert class_words(s.frozen) == "moderate (severe, eased by sugar)"
    assert s.frozen.sugar_percent == pytest.approx(5.0, abs=1e-6)


def test_liquid_temperatures_stand_beside_the_frozen_ones() -> None:
    result = _freeze(at_c=(37.0, 0.0, -4.2))
    s = _only(result)
    at = {p.temperature_c: p.ph for p in s.liquid}
    assert list(at) == [37.0, 25.0, 5.0, 0.0]
    assert at[25.0] == pytest.approx(7.4, abs=1e-6)
    assert at[37.0] < at[25.0] < at[5.0] < at[0.0]  # phosphate: pK2 rises on cooling
    assert -4.2 in result.temperatures_c
    for path in s.frozen.assessment.paths:
        assert tuple(p.temperature_c for p in path.points) == result.temperatures_c
        assert path.ph_prepared == pytest.approx(7.4, abs=1e-6)


@pytest.mark.parametrize(
    ("change", "words"),
    [
        ({"to_c": 5.0}, "above freezing"),
        ({"to_c": -31.0}, "below the data"),
        ({"to_c": float("nan")}, "no temperature"),
        ({"system": "none"}, "holds no buffer"),
        ({"mmol_l": -1.0}, "--concentration"),
        ({"mmol_l": 0.0}, "--concentration"),
        ({"ph": 15.0}, "--ph"),
        ({"system": "sodium_phosfate"}, "--system"),
        ({"added": {"--nacl": ("sodium_chloride", "mmol_l", -1.0)}}, "--nacl"),
        ({"at_c": (-40.0,)}, "--at"),
        ({"at_c": (200.0,)}, "--at"),
        ({"mmol_l": 2000.0}, "exceeds its solubility"),
    ],
)
def test_what_cannot_be_frozen_is_refused(
    change: dict[str, object], words: str
) -> None:
    with pytest.raises(InputError, match=words):
        _freeze(**change)  # type: ignore[arg-type]


def test_the_model_keeps_its_own_error(monkeypatch: pytest.MonkeyPatch) -> None:
    """A state that is not solved ends with its own kind of error, not a softer one."""

    def fail(*_args: object, **_options: object) -> None:
        msg = "state not solved"
        raise ConvergenceError(msg)

    frozen._assessed.cache_clear()
    monkeypatch.setattr("formbuf.product.freezing_assess.freeze_path", fail)
    with pytest.raises(ConvergenceError, match="state not solved"):
        _freeze()
    result = compare_freezing(
        brief_from_mapping(
            {"product": {"route": "oral_liquid"}, "ph": {"target": 7.0}}
        ),
        _library(),
    )
    assert result.systems == ()
    assert any("state not solved" in text for text in result.left_out)


def test_a_brief_compares_its_shortlist_in_order() -> None:
    result = _brief()
    data = {
        "product": {"route": "intravenous", "form": "frozen"},
        "ph": {"target": 7.4},
        "drug": {"kind": "none"},
        "tonicity": {"agent": "sodium_chloride"},
    }
    ranked = shortlist(brief_from_mapping(data), _library()).ranked
    assert [s.key for s in result.systems] == [c.key for c in ranked if c.mixture]
    assert result.is_frozen
    for s in result.systems:
        candidate = next(c for c in ranked if c.key == s.key)
        assert s.ph_before == pytest.approx(7.4, abs=1e-4)
        assert candidate.frozen.counted_class == s.frozen.counted_class
        assert {p.temperature_c for p in s.liquid} >= {25.0}
    by_key = {s.key: s for s in result.systems}
    assert by_key["sodium_phosphate"].frozen.counted_class == "severe"
    assert "avoid frozen" in by_key["sodium_phosphate"].verdict
    assert not by_key["tris_hydrochloride"].frozen.assessment.quantified


def _words(system: str, mmol_l: float, ph: float, to_c: float = -20.0) -> str:
    return _only(_freeze(system, mmol_l, ph, to_c)).verdict


def test_a_verdict_says_whether_it_was_computed_or_observed() -> None:
    """Words of classes.csv: no shift of malate is seen, none of glutamate published.

    Just below its freezing point sodium phosphate lets no salt crystallise and moves
    little by calculation alone; none of them may be said to hold its pH.
    """
    assert _words("sodium_phosphate", 50.0, 6.5, -0.4).startswith(
        "computed to move little"
    )
    malate = _only(_freeze("sodium_malate", 10.0, 6.0, -20.0))
    assert malate.frozen.assessment.freezing_class == "negligible"
    assert abs(malate.frozen.assessment.freezing_shift) > NEGLIGIBLE_BELOW
    assert malate.verdict == "little change was observed, more is computed; measure it"
    histidine = _words("histidine_hydrochloride", 20.0, 6.0)
    assert histidine == "freezing adds little; cooling alone moves the pH"
    assert _words("sodium_glutamate", 10.0, 4.5).endswith("no evidence is known")
    assert _words("sodium_tartrate", 10.0, 4.5).endswith("published without figures")
    assert _words("histidine_acetate", 10.0, 6.0).endswith("published without figures")


def test_what_was_not_computed_is_not_claimed() -> None:
    """The path ends at -20 C: nothing is said of -40 C."""
    s = _only(_freeze(mmol_l=5.0, ph=4.5, to_c=-25.0, added=SUGAR))
    assert s.frozen.assessment.reason.startswith(
        "no salt reaches its solubility down to -20 C"
    )
    assert s.where.endswith("down to -20 C")


def test_the_legend_says_what_decides_a_class() -> None:
    text = " ".join(render(freeze_thaw_page(_brief("liquid")), "table").split())
    assert "it decides the class where both paths are computed" in text
    assert "elsewhere published observations do" in text


def test_a_liquid_product_fails_only_when_frozen() -> None:
    result = _brief("liquid")
    assert not result.is_frozen
    assert result.lowest_c == -20.0
    phosphate = next(s for s in result.systems if s.key == "sodium_phosphate")
    assert phosphate.verdict == "fails only when frozen, which this product is not"


@pytest.mark.slow
def test_a_brief_takes_further_temperatures() -> None:
    data = {
        "product": {"route": "intravenous", "form": "frozen"},
        "ph": {"target": 7.4},
        "storage": [{"temperature_c": -80.0}],
    }
    brief = brief_from_mapping(data)
    result = compare_freezing(brief, _library(), at_c=(-3.5, 30.0))
    assert result.lowest_c == -80.0
    assert min(result.temperatures_c) == -20.0
    assert result.shown_c == (-3.5, -5.0, -10.0, -20.0)
    assert all(30.0 in {p.temperature_c for p in s.liquid} for s in result.systems)
    short = compare_freezing(brief, _library(), to_c=-6.0)
    assert short.temperatures_c[-1] == -6.0
    with pytest.raises(InputError, match="above freezing"):
        compare_freezing(brief, _library(), to_c=1.0)


def test_a_volatile_form_is_told_where_the_product_is_dried() -> None:
    """Practice: acetic acid leaves on drying; its share follows from pK and pH."""
    s = _only(_freeze("sodium_acetate", 20.0, 5.0))
    assert 0.3 < s.volatile_share < 0.45  # pK 4.76 with activity, at pH 5
    text = verdict(s.system, s.frozen, is_frozen=True, volatile_share=s.volatile_share)
    assert "on drying" in text
    assert "volatile" in text
    dried = _brief("dried", 7.0)
    acetate = next(s for s in dried.systems if s.key == "sodium_acetate")
    assert acetate.volatile_share < 0.01
    assert "on drying" not in acetate.verdict


def test_bicarbonate_is_told_its_own_reason() -> None:
    s = _only(_freeze("sodium_bicarbonate", 20.0, 7.5))
    assert "carbon dioxide leaves the liquid" in s.verdict


def _observation(**numbers: float) -> Observation:
    return Observation("x", ("sodium_phosphate",), numbers, {}, "gomez_2001", "memory")


def test_the_published_range_counts_what_bears_a_number() -> None:
    seen = tuple(
        RankedObservation(one, 0.0, False)
        for one in (
            _observation(ph_change=-3.2),
            _observation(ph_change_low=-0.5, ph_change_high=0.5),
            _observation(ph_frozen=4.0),
        )
    )
    found = published_change(seen)
    assert found is not None
    assert (found.low, found.high) == (-3.2, 0.5)
    assert (found.published, found.recalled) == (0, 2)
    assert range_words(found) == "-3.2 to +0.5 (2)"
    assert published_change(seen[2:]) is None
    assert range_words(None) == "no figure"
    assert observed_change(_observation(ph_change_high=-2.0)) == (-2.0, -2.0)


@pytest.mark.parametrize(
    ("numbers", "words"),
    [
        ({"ph_frozen": 4.2, "ph_frozen_error": 0.1}, "4.2 ± 0.1"),
        ({"ph_change": 0.0}, "change 0"),
        ({"ph_change": -3.0}, "change -3.0"),
        ({"ph_change_low": -2.0, "ph_change_high": -1.0}, "change -2.0 to -1.0"),
        ({"ph_change_low": -3.0}, "change down to -3.0"),
        ({"ph_change_high": -2.0}, "change -2.0 or below"),
        ({}, "-"),
    ],
)
def test_an_observation_in_words(numbers: dict[str, float], words: str) -> None:
    assert observed.frozen_words(_observation(**numbers)) == words


def test_sources_are_named_as_in_running_text() -> None:
    known = _library().sources
    assert observed.short_source(known["gomez_2001"]) == "Gomez et al. 2001"
    assert (
        observed.short_source(known["van_den_berg_1959"]) == "van den Berg & Rose 1959"
    )
    assert observed.full_source(known["gomez_2001"]).startswith("gomez_2001: Gomez G")


def test_data_hold_no_nan_and_follow_the_interface() -> None:
    for result in (_phosphate(), _brief()):
        text = json.dumps(freeze_thaw_dict(result), allow_nan=False)
        found = json.loads(text)
        assert found["schema"] == "formbuf.freeze_thaw/1"
        keys = {s["system"] for s in found["systems"]}
        assert {p["system"] for p in found["paths"]} == keys
        for path in found["paths"]:
            assert path["assumption"] in ("crystallising", "supersaturated")
            for point in path["points"]:
                assert {
                    "temperature_c",
                    "ph",
                    "ice_fraction",
                    "unfrozen_water_g_kg",
                    "solids",
                } <= set(point)
        rows = records(result)
        assert len({tuple(row) for row in rows}) == 1


def test_no_liquid_bears_no_ph() -> None:
    found = freeze_thaw_dict(_phosphate())
    path = found["paths"][0]
    assert path["points"][-1]["ph"] is None
    assert path["points"][-1]["unfrozen_water_g_kg"] == 0.0
    assert path["metastable_points"][-1]["ph"] is not None
    assert "no liquid" in [event["event"] for event in path["events"]]


@pytest.mark.parametrize("width", [80, 120])
def test_tables_fit_their_width(width: int) -> None:
    for result in (_phosphate(), _brief(), _brief("liquid"), _brief("dried", 5.0)):
        lines = render(freeze_thaw_page(result), "table", width=width).splitlines()
        assert max(map(len, lines)) <= width


def test_the_table_reads_from_liquid_to_frozen() -> None:
    blocks = freeze_thaw_page(_phosphate()).blocks()
    assert isinstance(blocks[0], Heading)
    assert blocks[0].text == title_of(_phosphate())
    grid = next(b for b in blocks if isinstance(b, Grid))
    at = [float(row[0]) for row in grid.rows]
    assert at == sorted(at, reverse=True)
    last = grid.rows[-1]
    assert last[0] == "-10"
    assert last[2].startswith("(3.")  # metastable, in brackets
    said = [row[1] for row in grid.rows]
    assert said[0] == "pH as set"
    assert "first ice" in said
    assert "Na2HPO4.12H2O crystallises" in said


def test_a_salt_that_leaves_before_the_ice_bears_no_liquid_ph() -> None:
    """400 mmol/L passes the solubility of Na2HPO4.12H2O near 16 C, before any ice."""
    blocks = freeze_thaw_page(_freeze(mmol_l=400.0)).blocks()
    grid = next(b for b in blocks if isinstance(b, Grid))
    row = next(row for row in grid.rows if row[0] == "5")
    assert row[2] == "-"
    assert row[3] != "-"


def test_paths_that_coincide_share_a_line() -> None:
    """At pH 6 with sucrose no phosphate salt reaches its solubility."""
    data = {
        "product": {"route": "intravenous", "form": "frozen"},
        "ph": {"target": 6.0},
        "drug": {"kind": "none"},
        "tonicity": {"agent": "sucrose"},
    }
    result = compare_freezing(brief_from_mapping(data), _library())
    grid = next(b for b in freeze_thaw_page(result).blocks() if isinstance(b, Grid))
    names = [row[0] for row in grid.rows]
    place = next(i for i, name in enumerate(names) if "sodium phosphate" in name)
    assert names[place + 1] == "  on both paths"
    salted = freeze_thaw_page(_brief()).blocks()
    grid = next(b for b in salted if isinstance(b, Grid))
    names = [row[0] for row in grid.rows]
    place = next(i for i, name in enumerate(names) if "sodium phosphate" in name)
    assert names[place + 1 : place + 3] == ["  salts crystallise", "  no salt does"]


def test_the_figure_is_the_same_twice_and_says_what_it_shows() -> None:
    first = drawing.figure_bytes(_phosphate(), "svg")
    assert first == drawing.figure_bytes(_phosphate(), "svg")
    root = ET.fromstring(first.decode("utf-8"))
    said = " ".join(root.itertext())
    for words in (
        "Temperature, °C",
        "pH of the liquid",
        "between the bounds",
        "bound: no salt crystallises",
        "Na₂HPO₄·12H₂O crystallises, −0.6 °C",
        "no liquid below, −9.8 °C",
        "measured, published",
        "50, 100 mmol/L, pH 7.4",
        title_of(_phosphate()),
    ):
        assert words in said, words


@pytest.mark.slow
def test_several_systems_are_small_multiples() -> None:
    result = _brief()
    figure = drawing.draw(result)
    panels = [a for a in figure.axes if a.get_visible()]
    assert len(panels) == len(result.systems)
    titles = " ".join(a.get_title().replace("\n", " ") for a in panels)
    assert all(s.name in titles for s in result.systems)
    assert drawing.figure_bytes(result, "png").startswith(b"\x89PNG")


def test_the_drawn_curve_passes_through_its_events() -> None:
    fine = drawing.fine_temperatures(-10.0)
    assert fine[0] == 0.0
    assert fine[-1] == -10.0
    path = _only(_phosphate()).trace(fine).assessment.paths[0]
    at, _ = drawing._curve(path)
    onset, last = path.event("onset"), path.event("no liquid")
    assert onset is not None
    assert last is not None
    assert onset.temperature_c in at
    assert at[-1] == last.temperature_c


def test_lines_differ_in_lightness() -> None:
    """Relative luminance as in WCAG 2: dark, bright and band apart in greyscale."""

    def luminance(colour: str) -> float:
        parts = [int(colour[i : i + 2], 16) / 255.0 for i in (1, 3, 5)]
        linear = [
            x / 12.92 if x <= 0.03928 else ((x + 0.055) / 1.055) ** 2.4 for x in parts
        ]
        return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]

    dark, bright, band = (
        luminance(c) for c in (drawing._DARK, drawing._BRIGHT, drawing._BAND)
    )
    assert (bright + 0.05) / (dark + 0.05) > 2.0
    assert (band + 0.05) / (bright + 0.05) > 2.0


def test_unknown_names_keep_their_kind() -> None:
    with pytest.raises(UnknownNameError):
        _library().get_system("sodium_phosfate")


@pytest.mark.bench
def test_speed() -> None:
    """One path of 100 temperatures under 0.5 s; a brief under 3 s (processor time)."""
    s = _only(_freeze(to_c=-20.0))
    hundred = tuple(-0.2 * i for i in range(100))
    begun = time.process_time()
    s.trace(hundred)
    spent = time.process_time() - begun
    print(f"both paths at 100 temperatures: {spent:.2f} s")
    assert spent < 0.5
    data = {
        "product": {"route": "oral_liquid", "form": "frozen"},
        "ph": {"target": 6.5},
        "drug": {"kind": "antibody"},
    }
    begun = time.process_time()
    found = compare_freezing(brief_from_mapping(data), _library())
    spent = time.process_time() - begun
    print(f"{len(found.systems)} systems: {spent:.2f} s")
    assert spent < 3.0
