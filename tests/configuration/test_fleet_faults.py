import pytest

from tests.configuration.examples import FLEET, fleet_faults, fleet_of

NO_LIMIT = (
    "the operation has no limit; expected: at least one of max_density_altitude_ft, max_density_altitude_m, "
    "max_pressure_altitude_ft, max_pressure_altitude_m, max_temperature_c, max_temperature_f or max_isa_deviation_c"
)
NO_NUMBER = "is no plain decimal number; expected: digits as in 6350, -3 or 0.5"


@pytest.mark.parametrize(
    ("operation", "expected"),
    [
        ("name: Winch", [f"6: {NO_LIMIT}"]),
        (
            "name: Winch, max_density_altitud_ft: 6000",
            ["6: unknown key 'max_density_altitud_ft'; did you mean max_density_altitude_ft?"],
        ),
        ("name: Winch, max_density_altitude: 6000", None),
        (
            "name: Winch, max_density_altitude_ft: 30001",
            ["6: max_density_altitude_ft: '30001' is out of range; expected: at most 30000"],
        ),
        ("name: Winch, max_density_altitude_ft: 63500", None),
        (
            "name: Winch, max_density_altitude_m: -1525",
            ["6: max_density_altitude_m: '-1525' is out of range; expected: at least -1524"],
        ),
        ("name: Winch, max_temperature_c: 61", ["6: max_temperature_c: '61' is out of range; expected: at most 60"]),
        ("name: Winch, max_temperature_f: 141", ["6: max_temperature_f: '141' is out of range; expected: at most 140"]),
        (
            "name: Winch, max_isa_deviation_c: 86",
            ["6: max_isa_deviation_c: '86' is out of range; expected: at most 85"],
        ),
        (
            "name: Winch, max_isa_deviation_f: 50",
            ["6: unknown key 'max_isa_deviation_f'; did you mean max_isa_deviation_c?"],
        ),
        (
            "name: Winch, max_temperature_c: hot",
            [f"6: max_temperature_c: 'hot' {NO_NUMBER}"],
        ),
        (
            "name: Winch, max_temperature_c: [40]",
            ["6: max_temperature_c: a list stands here; expected: a number or a table"],
        ),
        (
            "name: Winch, max_temperature_c: '40'",
            ["6: max_temperature_c: '40' is text; expected: a number or a table, without quotes"],
        ),
        (
            "name: Winch, max_temperature_c: {}",
            ["6: max_temperature_c has neither a number nor a table; expected: one of them"],
        ),
        ("max_temperature_c: 40", ["6: name is missing; expected: a line such as 'name: Departure'"]),
        (
            "name: Winch, max_temperature_c: 40, max_temperature_f: 104",
            ["6: max_temperature_f gives again what max_temperature_c gives in line 6; expected: one of them"],
        ),
        (
            "name: Winch, max_density_altitude_m: 1800, max_density_altitude_ft: 6000",
            [
                "6: max_density_altitude_ft gives again what max_density_altitude_m gives in line 6; "
                "expected: one of them"
            ],
        ),
        (
            "name: Winch, max_temperature_c: 40, near_band_c: 3, near_band_f: 5, deadband_ft: 3, deadband_m: 1",
            [
                "6: deadband_m gives again what deadband_ft gives in line 6; expected: one of them",
                "6: near_band_f gives again what near_band_c gives in line 6; expected: one of them",
            ],
        ),
        (
            "name: Winch, max_temperature_c: 40, near_band_c: -1",
            ["6: near_band_c: '-1' is out of range; expected: at least 0"],
        ),
        (
            "name: Winch, max_temperature_c: 40, off_delay_min: -1",
            ["6: off_delay_min: '-1' is out of range; expected: at least 0"],
        ),
        (
            "name: Winch, max_temperature_c: 40, off_delay_s: 600",
            ["6: unknown key 'off_delay_s'; did you mean off_delay_min?"],
        ),
        (
            "name: Winch, max_temperature_c: 40, phase: departing",
            [
                "6: phase: 'departing' is not possible here; expected: departure, arrival or local; "
                "did you mean 'departure'?"
            ],
        ),
        (
            "name: Winch, max_temperature_c: 40, basis: flight manul",
            [
                "6: basis: 'flight manul' is not possible here; expected: flight manual, operator policy or local "
                "order; did you mean 'flight manual'?"
            ],
        ),
        (
            "name: Winch, max_temperature_c: 40, acceptance: yes",
            ["6: acceptance: 'yes' is not possible here; expected: simple or guarded"],
        ),
        (
            "name: Winch, max_temperature_c: 40, valid_from: 2026-02-30",
            ["6: valid_from: '2026-02-30' is no day; expected: year-month-day, such as 2026-06-01"],
        ),
        ("name: Winch, max_temperature_c: 40, valid_from: 2026-6-1", None),
        ("name: Winch, max_temperature_c: 40, valid_from: 2026-W23-1", None),
        ("name: Winch, max_temperature_c: 40, valid_from: 20260601", None),
        ("name: Winch, max_temperature_c: 40, valid_from: 2026-06-01T00:00", None),
        ("name: Winch, max_temperature_c: 40, valid_from: 01.06.2026", None),
        (
            "name: Winch, max_temperature_c: 40, valid_from: 2026-06-02, valid_until: 2026-06-01",
            ["6: valid_until '2026-06-01' is before valid_from '2026-06-02'; expected: not before it"],
        ),
        ("name: 12, max_temperature_c: 40", None),
        ("name: true, max_temperature_c: 40", None),
        ("name: '', max_temperature_c: 40", ["6: name: it is empty; a name is expected"]),
        (
            'name: "a\\u200bb", max_temperature_c: 40',
            ["6: name: an invisible character (U+200B) stands in 'a<U+200B>b'; take it out"],
        ),
        (
            'name: "a\\nb", max_temperature_c: 40',
            ["6: name: an invisible character (U+000A) stands in 'a<U+000A>b'; take it out"],
        ),
    ],
)
def test_a_fault_of_an_operation_is_named(operation: str, expected: list[str] | None) -> None:
    found = fleet_faults(fleet_of(operation))

    if expected is None:
        assert len(found) == 1
        assert found[0].startswith("6: ")
    else:
        assert found == expected


@pytest.mark.parametrize(
    ("table", "expected"),
    [
        ("{by_weight_lb: {1950: 7400}}", ["by_weight_lb: it has too few entries; expected: at least 2"]),
        ("{by_weight_lb: {}}", ["by_weight_lb: it has too few entries; expected: at least 2"]),
        ("{by_weight_lb: 7400}", ["by_weight_lb: '7400' stands here; expected: keys with values under it"]),
        (
            "{by_weight_lb: {1950: 7400, 2200: 7400}}",
            [
                "by_weight_lb: the limit 7400 at 2200 is not below the limit at 1950; "
                "expected: limits that fall as weight rises"
            ],
        ),
        (
            "{by_weight_lb: {2450: 6950, 2200: 6550, 1950: 7400}}",
            [
                "by_weight_lb: the limit 6950 at 2450 is not below the limit at 2200; "
                "expected: limits that fall as weight rises"
            ],
        ),
        (
            "{by_weight_lb: {2200: 7400, 2200.0: 7000, 2400: 6000}}",
            ["by_weight_lb: the weight '2200.0' is given twice; it stands in line 6 already"],
        ),
        (
            "{by_weight_lb: {2200: 7400, 2200: 7000, 2400: 6000}}",
            ["'2200' is given twice; it stands in line 6 already"],
        ),
        (
            "{by_weight_lb: {heavy: 7400, 2200: 7000, 2400: 6000}}",
            ["by_weight_lb: 'heavy' is no weight; expected: a plain decimal number"],
        ),
        (
            "{by_weight_lb: {02100: 7400, 2200: 7000, 2400: 6000}}",
            ["by_weight_lb: '02100' is no weight; expected: a plain decimal number"],
        ),
        (
            "{by_weight_lb: {0: 7400, 2200: 7000}}",
            ["by_weight_lb: the weight '0' is out of range; expected: more than 0 and at most 2000000"],
        ),
        (
            "{by_weight_lb: {-5: 7400, 2200: 7000}}",
            ["by_weight_lb: the weight '-5' is out of range; expected: more than 0 and at most 2000000"],
        ),
        (
            "{by_weight_kg: {550: 7400, 999999: 7000}}",
            ["by_weight_kg: the weight '999999' is out of range; expected: more than 0 and at most 907184"],
        ),
        (
            "{by_weight_lb: {1950: 7400, 2200: 6950}, by_weight_kg: {880: 7400, 1000: 6950}}",
            ["by_weight_kg gives again what by_weight_lb gives in line 6; expected: one of them"],
        ),
        ("{by_weigth_lb: {1950: 7400, 2200: 6950}}", ["unknown key 'by_weigth_lb'; did you mean by_weight_lb?"]),
        (
            "{by_pressure_altitude_ft: {0: 7400, 2000: 6950}}",
            ["by_pressure_altitude_ft does not belong here; only a temperature limit may go by pressure altitude"],
        ),
        (
            "{by_weight_lb: {1950: high, 2200: 6950}}",
            [f"by_weight_lb, '1950': 'high' {NO_NUMBER}"],
        ),
        (
            "{by_weight_lb: {1950: 74000, 2200: 6950}}",
            ["by_weight_lb, '1950': '74000' is out of range; expected: at most 30000"],
        ),
        ("{by_weight_lb: {1950: , 2200: 6950}}", ["'1950' has no value; give it one, or take the line out"]),
    ],
)
def test_a_fault_of_a_table_is_named(table: str, expected: list[str]) -> None:
    found = fleet_faults(fleet_of(f"name: Winch, max_density_altitude_ft: {table}"))

    assert found == [f"6: {message}" for message in expected]


@pytest.mark.parametrize(
    ("table", "expected"),
    [
        (
            "{by_weight_lb: {1950: 40, 2200: 38}, by_pressure_altitude_ft: {0: 40, 2000: 38}}",
            ["max_temperature_c has two tables; expected: one of them"],
        ),
        (
            "{by_pressure_altitude_ft: {-5001: 40, 30001: 38}}",
            [
                "by_pressure_altitude_ft: the pressure altitude '-5001' is out of range; expected: at least -5000 and "
                "at most 30000",
                "by_pressure_altitude_ft: the pressure altitude '30001' is out of range; expected: at least -5000 and "
                "at most 30000",
            ],
        ),
        (
            "{by_pressure_altitude_ft: {0: 40, 0.0: 38, 2000: 30}}",
            ["by_pressure_altitude_ft: the pressure altitude '0.0' is given twice; it stands in line 6 already"],
        ),
        (
            "{by_pressure_altitude_ft: {0: 40, -0: 38, 2000: 30}}",
            ["by_pressure_altitude_ft: the pressure altitude '-0' is given twice; it stands in line 6 already"],
        ),
    ],
)
def test_a_fault_of_a_table_by_pressure_altitude_is_named(table: str, expected: list[str]) -> None:
    found = fleet_faults(fleet_of(f"name: Winch, max_temperature_c: {table}"))

    assert found == [f"6: {message}" for message in expected]


def test_points_over_several_lines_have_their_own() -> None:
    text = fleet_of("name: Winch, max_temperature_c: 40") + (
        "      - name: Aerotow\n"
        "        max_density_altitude_ft:\n"
        "          by_weight_lb:\n"
        "            1950: 7400\n"
        "            2200: 7500\n"
        "            2450: 7x\n"
    )

    assert fleet_faults(text) == [
        "11: by_weight_lb: the limit 7500 at 2200 is not below the limit at 1950; expected: limits that fall as weight "
        "rises",
        f"12: by_weight_lb, '2450': '7x' {NO_NUMBER}",
    ]


def test_two_undated_entries_of_one_name_are_a_fault() -> None:
    text = fleet_of(
        "name: Winch, max_temperature_c: 40",
        "name: Winch, max_density_altitude_ft: 6000, valid_from: 2026-06-01",
        "name: Winch, max_density_altitude_ft: 6000",
    )

    assert fleet_faults(text) == [
        "8: the operation 'Winch' stands without dates in line 6 already; expected: valid_from or valid_until in all "
        "entries but one"
    ]


def test_entries_of_one_name_with_different_phases_are_a_fault() -> None:
    text = fleet_of(
        "name: Winch, max_temperature_c: 40, phase: local",
        "name: Winch, max_temperature_c: 38, valid_from: 2026-06-15",
        "name: Winch, max_temperature_c: 38, valid_from: 2026-06-15, phase: departure",
    )

    assert fleet_faults(text) == [
        "8: phase 'departure' differs from 'local' in line 6; expected: one phase for all entries of an operation"
    ]


def test_one_operation_spelt_in_two_ways_is_a_fault() -> None:
    text = fleet_of(
        "name: Solo circuits, max_temperature_c: 40",
        "name: solo  Circuits, max_temperature_c: 38, valid_from: 2026-06-15",
        "name: solo  Circuits, max_temperature_c: 37, valid_from: 2026-07-15",
    )

    assert fleet_faults(text) == [
        "7: the operation 'solo  Circuits' is spelt 'Solo circuits' in line 6; expected: one spelling, so that the "
        "lowest limit of both counts"
    ]


def test_two_aircraft_with_one_id_are_a_fault() -> None:
    assert fleet_faults(FLEET.replace("id: tow-plane", "id: trainer-2")) == [
        "19: id 'trainer-2' is that of the aircraft in line 5 too; expected: an id of its own"
    ]


@pytest.mark.parametrize("identifier", ["two seats", "a/b", "-x", "ü", "x" * 65, '"a\\n"'])
def test_an_id_has_plain_letters_only(identifier: str) -> None:
    found = fleet_faults(FLEET.replace("id: tow-plane", f"id: {identifier}"))

    assert len(found) == 1
    assert found[0].startswith("19: id: ")
    assert "expected: letters, digits, '-', '_' and '.', at most 64, a letter or digit first" in found[0]


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("schema: 1\n", ["1: aircraft is missing; expected: 'aircraft:' and a list under it"]),
        ("schema: 1\naircraft: []\n", ["2: aircraft: it has too few entries; expected: at least 1"]),
        (
            "schema: 1\naircraft: {}\n",
            ["2: aircraft: a group of keys stands here; expected: a list, each item with '- ' before it"],
        ),
        ("schema: 1\naircraft: [a]\n", ["2: aircraft, item 1: 'a' stands here; expected: keys with values under it"]),
        (
            "schema: 1\naircraft:\n  - id: a\n  - operations: []\n",
            [
                "3: operations is missing; expected: 'operations:' and a list under it",
                "4: id is missing; expected: a line such as 'id: trainer-2'",
                "4: operations: it has too few entries; expected: at least 1",
            ],
        ),
        (
            "schema: 1\ndefaults: {near_band_ft: 500, near_band_m: 150, acceptance: guarded}\naircraft: no\n",
            [
                "2: acceptance does not belong here; it belongs under 'operations'",
                "2: near_band_m gives again what near_band_ft gives in line 2; expected: one of them",
                "3: aircraft: 'no' stands here; expected: a list, each item with '- ' before it",
            ],
        ),
        (
            "schema: 1\ndefaults: [a]\naircraft:\n  - id: 5\n    operations: {name: Winch}\n",
            [
                "2: defaults: a list stands here; expected: keys with values under it",
                "4: id: '5' is not read as text; expected: a text, so put it in quotes: \"5\"",
                "5: operations: a group of keys stands here; expected: a list, each item with '- ' before it",
            ],
        ),
    ],
)
def test_faults_of_the_whole_are_named(text: str, expected: list[str]) -> None:
    assert fleet_faults(text) == expected


def test_all_faults_of_a_fleet_come_together() -> None:
    text = FLEET
    for old, new in (
        ("deadband_ft: 150", "deadband_ft: 12:30"),
        ("group: Flying school", "gruop: Flying school"),
        ("6350", "017"),
        ("basis: operator policy", "basis: no"),
        ("2026-09-30", "2026-05-30"),
        ("6950", "7950"),
        ("max_temperature_c: 45", "max_temperature_c: 45\n        max_temperature_f: 110"),
    ):
        assert text.count(old) == 1
        text = text.replace(old, new)

    assert [int(fault.split(":")[0]) for fault in fleet_faults(text)] == [3, 7, 10, 11, 17, 24, 26]


def test_an_aliased_value_is_one_fault_and_not_two() -> None:
    text = FLEET.replace("6350", "&limit 6350").replace("5600", "*limit")

    assert fleet_faults(text) == [
        "10: anchors ('&limit') are not read; leave it out",
        "15: aliases ('*limit') are not read; write the value out",
    ]
