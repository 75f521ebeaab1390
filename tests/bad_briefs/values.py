"""Values that cannot be: pH, route, names, temperatures, dose and loads."""

from bad_briefs.row import after_is_wrong, ph_is_wrong, route_is_wrong

VALUES = [
    ph_is_wrong(
        "ph_15", "target = 15\n", "ph.target (line 4)", "too large", "15", "1 to 13"
    ),
    ph_is_wrong(
        "ph_negative", "target = -2\n", "ph.target (line 4)", "too small", "1 to 13"
    ),
    ph_is_wrong(
        "ph_nan", "target = nan\n", "ph.target (line 4)", "no finite number", "nan"
    ),
    ph_is_wrong("ph_inf", "target = inf\n", "ph.target (line 4)", "no finite number"),
    ph_is_wrong(
        "ph_text", 'target = "6.0"\n', "ph.target (line 4)", "a number", "'6.0'"
    ),
    ph_is_wrong("ph_true", "target = true\n", "ph.target (line 4)", "a number", "true"),
    ph_is_wrong("ph_list", "target = [6.0]\n", "ph.target (line 4)", "a list of 1"),
    ph_is_wrong("ph_date", "target = 2026-01-01\n", "ph.target (line 4)", "2026-01-01"),
    ph_is_wrong(
        "enormous_integer",
        f"target = 1{'0' * 400}\n",
        "ph.target (line 4)",
        "too large",
        "more than 15 digits",
    ),
    ph_is_wrong("enormous_float", "target = 1e300\n", "ph.target (line 4)", "1e+300"),
    ph_is_wrong(
        "window_without_target",
        "target = 6\nlow = 6.5\nhigh = 7\n",
        "ph.target (line 4)",
        "outside its window 6.5 to 7",
    ),
    ph_is_wrong(
        "window_upside_down",
        "target = 6\nlow = 7\nhigh = 5\n",
        "ph.low (line 5)",
        "not below high",
    ),
    ph_is_wrong(
        "low_alone", "target = 6\nlow = 5.5\n", "ph.low (line 5)", "without high"
    ),
    ph_is_wrong(
        "storage_high_alone",
        "target = 6\nstorage_high = 7\n",
        "ph.storage_high (line 5)",
        "without storage_low",
    ),
    ph_is_wrong(
        "no_room_at_release",
        "target = 6\nlow = 5.9\nhigh = 6.1\nrelease_tolerance = 0.1\n",
        "ph.release_tolerance (line 7)",
        "no room",
        "below 0.1",
    ),
    route_is_wrong(
        "unknown_route",
        'route = "subcutanous"\n',
        "product.route (line 4)",
        "'subcutanous'",
        "intravenous",
        hint="Did you mean 'subcutaneous'",
    ),
    route_is_wrong(
        "route_short", 'route = "s.c."\n', "product.route (line 4)", hint="subcut"
    ),
    route_is_wrong("route_number", "route = 3\n", "product.route (line 4)", "value 3"),
    route_is_wrong(
        "trade_word_for_form",
        'route = "nasal"\nform = "lyophilised"\n',
        "product.form (line 5)",
        hint="'dried' instead of 'lyophilised'",
    ),
    route_is_wrong(
        "control_character",
        'route = "nasal"\nname = "A\\u0007B"\n',
        "product.name (line 5)",
        "control character",
        "\\x07",
    ),
    route_is_wrong(
        "direction_mark",
        'route = "nasal"\nname = "A\\u202EB"\n',
        "product.name (line 5)",
        "direction mark",
    ),
    route_is_wrong(
        "empty_name", 'route = "nasal"\nname = ""\n', "product.name (line 5)"
    ),
    route_is_wrong(
        "long_name",
        f'route = "nasal"\nname = "{"x" * 5000}"\n',
        "product.name (line 5)",
        "at most 200 letters",
        "...",
    ),
    after_is_wrong(
        "temperature_500",
        "[[storage]]\ntemperature_c = 500\n",
        "storage[1].temperature_c (line 6)",
        "500",
        "-200 to 150",
    ),
    after_is_wrong(
        "below_absolute_zero",
        "[[storage]]\ntemperature_c = -300\n",
        "storage[1].temperature_c (line 6)",
        "too small",
    ),
    after_is_wrong(
        "liquid_at_minus_40",
        '[[storage]]\ntemperature_c = -40\nstate = "liquid"\n',
        "storage[1].temperature_c (line 6)",
        "no temperature of a liquid",
    ),
    after_is_wrong(
        "dried_at_minus_196",
        '[[storage]]\ntemperature_c = -196\nstate = "dried"\n',
        "storage[1].temperature_c (line 6)",
        "too cold",
    ),
    after_is_wrong(
        "frozen_at_5",
        '[[storage]]\ntemperature_c = 5\nstate = "frozen"\n',
        "storage[1].temperature_c (line 6)",
        "melting point",
    ),
    after_is_wrong(
        "liquid_at_140",
        "[[storage]]\ntemperature_c = 140\n",
        "storage[1].temperature_c (line 6)",
        "above any liquid",
    ),
    after_is_wrong(
        "body_at_5",
        '[[storage]]\nkind = "body"\ntemperature_c = 5\n',
        "storage[1].temperature_c (line 7)",
        "no body temperature",
    ),
    after_is_wrong(
        "storage_twice",
        "[[storage]]\ntemperature_c = 5\n[[storage]]\ntemperature_c = 5\n",
        "storage[2] (line 7)",
        "repeats",
    ),
    after_is_wrong(
        "unknown_state",
        '[[storage]]\ntemperature_c = 5\nstate = "gas"\n',
        "storage[1].state (line 7)",
        "liquid, frozen, dried",
    ),
    after_is_wrong(
        "volume_negative", "[dose]\nvolume_ml = -1\n", "dose.volume_ml (line 6)"
    ),
    after_is_wrong(
        "volume_zero", "[dose]\nvolume_ml = 0\n", "dose.volume_ml (line 6)", "above 0"
    ),
    after_is_wrong(
        "load_negative", "[loads]\nacid_mmol_l = -0.1\n", "loads.acid_mmol_l"
    ),
]
