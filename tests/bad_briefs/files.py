"""Files that are no brief, and keys out of place."""

from bad_briefs.row import (
    GOOD_HEAD,
    BadBrief,
    after_is_wrong,
    ph_is_wrong,
    route_is_wrong,
)

FILES = [
    BadBrief("empty", b"", "", ("is empty",), "[ph] with target"),
    BadBrief("blank", b" \n\t\n", "", ("is empty",), "[product] with route"),
    BadBrief("comments_only", "# nothing\n# here\n", "", ("holds no brief",)),
    BadBrief("binary", b"\x7fELF\x00\x01\x02", "", ("no text", "zero bytes")),
    BadBrief("utf16", "title = 'x'\n".encode("utf-16"), "", ("UTF-16",), "UTF-8"),
    BadBrief("latin1", b"[product]\nname = 'caf\xe9'\n", "(line 2)", ("0xe9", "UTF-8")),
    BadBrief("huge", b"# x\n" * 300_000, "", ("larger", "at most 1 MB")),
    BadBrief("deep", "a = " + "[" * 20_000, "", ("nested too deeply",)),
    BadBrief(
        "long_number", f"a = {'9' * 5000}\n", "(line 1)", ("too long", "15 digits")
    ),
    BadBrief("json", '{"product": {}}', "line 1", ("not valid TOML",)),
    BadBrief("no_value", "[ph]\ntarget =\n", "target (line 2)", ("not valid TOML",)),
    BadBrief(
        "decimal_comma",
        "[ph]\ntarget = 6,0\n",
        "target (line 2)",
        ("not valid TOML",),
        "decimals have a point",
    ),
    BadBrief(
        "letter_for_digit",
        "[ph]\ntarget = O.5\n",
        "target (line 2)",
        ("Invalid value",),
        "decimals have a point",
    ),
    BadBrief("open_text", '[product]\nroute = "sub\n', "route (line 2)", ("TOML",)),
    BadBrief("open_list", 'exclude = ["tris"\n', "exclude (line 1)", ("TOML",)),
    BadBrief(
        "same_key",
        GOOD_HEAD + "low = 5.8\nhigh = 6.2\nlow = 5.7\n",
        "ph.low (line 7)",
        ("set twice", "first on line 5"),
    ),
    BadBrief(
        "same_table",
        GOOD_HEAD + "[dose]\nvolume_ml = 1\n[dose]\nper_day = 1\n",
        "dose (line 7)",
        ("set twice", "first on line 5"),
    ),
    BadBrief(
        "same_key_in_entry",
        GOOD_HEAD + "[[storage]]\ntemperature_c = 5\ntemperature_c = 6\n",
        "storage[1].temperature_c (line 7)",
        ("set twice",),
    ),
]

KEYS = [
    BadBrief("no_product", "[ph]\ntarget = 6\n", "product", ("missing", "route")),
    BadBrief(
        "no_ph", '[product]\nroute = "nasal"\n', "ph", ("missing", "[ph] with target")
    ),
    ph_is_wrong(
        "no_target", "low = 5\nhigh = 6\n", "ph.target (line 3)", "missing", "1 to 13"
    ),
    route_is_wrong(
        "no_route", 'form = "liquid"\n', "product.route (line 3)", "missing"
    ),
    route_is_wrong(
        "misspelt_key",
        'rout = "nasal"\n',
        "product.rout (line 4)",
        "unknown key",
        hint="'route' instead of 'rout'",
    ),
    after_is_wrong(
        "unknown_table",
        "[doze]\nvolume_ml = 1\n",
        "doze (line 5)",
        "unknown key",
        hint="'dose'",
    ),
    after_is_wrong(
        "key_in_wrong_table",
        "[dose]\nfill_volume_ml = 1\n[container]\nper_day = 1\n",
        "dose.fill_volume_ml (line 6)",
        "container.per_day (line 8)",
        hint="'per_day' belongs in [dose]",
    ),
    after_is_wrong(
        "list_after_table",
        '[dose]\nvolume_ml = 1\nexclude = ["tris"]\n',
        "dose.exclude (line 7)",
        "unknown key",
        hint="before the first table",
    ),
    after_is_wrong(
        "table_for_list",
        "[storage]\ntemperature_c = 5\n",
        "storage (line 5)",
        "list of tables",
        hint="[[storage]]",
    ),
    after_is_wrong(
        "list_for_table", "[[dose]]\nvolume_ml = 1\n", "dose (line 5)", "a table"
    ),
    BadBrief(
        "value_for_table", 'ph = 6.0\n[product]\nroute = "nasal"\n', "ph (line 1)"
    ),
    BadBrief(
        "text_for_list",
        'exclude = "tris"\n' + GOOD_HEAD,
        "exclude (line 1)",
        ("must be a list", "'tris'"),
        "exclude = ['tris']",
    ),
    BadBrief(
        "number_in_list",
        "exclude = [3]\n" + GOOD_HEAD,
        "exclude[1] (line 1)",
        ("must be a text",),
    ),
    after_is_wrong(
        "list_too_long",
        "[[storage]]\ntemperature_c = 5\n" * 31,
        "storage (line 5)",
        "too long",
        "at most 30",
    ),
]
