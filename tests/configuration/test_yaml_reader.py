import pytest

from airfield_board.configuration import yaml_reader
from airfield_board.configuration.yaml_nodes import Mapping, PlainValue, plain_number
from airfield_board.configuration.yaml_reader import LARGEST_FILE_BYTES, read_document


def plain(text: str) -> PlainValue:
    document = read_document(text, "file.yaml")
    assert document.faults == ()
    assert document.root is not None
    return document.root.plain()


def faults(content: str | bytes) -> list[str]:
    return [str(fault) for fault in read_document(content, "file.yaml").faults]


@pytest.mark.parametrize(
    ("written", "value"),
    [
        ("6350", 6350),
        ("-0.5", -0.5),
        ("0", 0),
        ("1.0", 1.0),
        # What YAML 1.1 would turn into a truth value, a sexagesimal, an octal, a date or a float stays text.
        ("no", "no"),
        ("yes", "yes"),
        ("on", "on"),
        ("off", "off"),
        ("y", "y"),
        ("12:30", "12:30"),
        ("190:20:30", "190:20:30"),
        ("017", "017"),
        ("0o17", "0o17"),
        ("0x1F", "0x1F"),
        ("0b1", "0b1"),
        ("6_350", "6_350"),
        ("6,350", "6,350"),
        ("+5", "+5"),
        (".5", ".5"),
        ("5.", "5."),
        ("1e3", "1e3"),
        (".inf", ".inf"),
        ("-.INF", "-.INF"),
        (".nan", ".nan"),
        ("NaN", "NaN"),
        ("２９", "２９"),
        ("2026-06-01", "2026-06-01"),
        ("2026-06-01T00:00:00Z", "2026-06-01T00:00:00Z"),
        ("=", "="),
        ("true", True),
        ("False", False),
        ('"6350"', "6350"),
        ("'true'", "true"),
        ('""', ""),
        ('"null"', "null"),
        ("|\n  6350", "6350\n"),
        ("9" * 40, float("9" * 40)),
        ("9" * 41, "9" * 41),
    ],
)
def test_plain_values_are_decimals_truths_or_the_text_as_it_stands(written: str, value: PlainValue) -> None:
    read = plain(f"key: {written}\n")

    assert read == {"key": value}
    assert isinstance(read, dict)
    assert type(read["key"]) is type(value)


def test_a_plain_number_is_whole_or_has_decimals() -> None:
    assert plain_number("12") == 12
    assert isinstance(plain_number("12"), int)
    assert isinstance(plain_number("12.0"), float)
    assert plain_number("12 ") is None
    assert plain_number("1\n") is None
    assert plain_number("") is None


def test_keys_are_text_whatever_they_look_like() -> None:
    assert plain("1950: a\n'2200': b\nyes: c\n017: d\n") == {"1950": "a", "2200": "b", "yes": "c", "017": "d"}


def test_lists_mappings_and_a_marked_single_document_are_read() -> None:
    assert plain("%YAML 1.2\n---\na: [1, {b: two}]\nc:\n  - x\n...\n") == {"a": [1, {"b": "two"}], "c": ["x"]}


def test_a_byte_order_mark_and_windows_line_ends_are_harmless() -> None:
    document = read_document("\ufeffa: 1\r\nb:\r\n  c: 2\r\n".encode(), "file.yaml")

    assert document.root is not None
    assert document.root.plain() == {"a": 1, "b": {"c": 2}}
    assert document.find(("b", "c"))[1] == 3


def test_a_path_leads_to_its_line_or_to_the_last_one_found() -> None:
    document = read_document("a:\n  - b: 1\n  -\n    b: 2\nc:\n  5\n", "file.yaml")

    assert document.find(("a", 0))[1] == 2
    assert document.find(("a", 1, "b"))[1] == 4
    assert document.find(("c",))[1] == 5
    assert document.find(("a", 7, "b")) == (None, 1)
    assert document.find(("c", "d")) == (None, 5)
    assert document.find(("a", 1, "d")) == (None, 4)
    assert document.find(("z",)) == (None, 1)


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("a: 1\nb: 2\na: 3\n", ["file.yaml:3: 'a' is given twice; it stands in line 1 already"]),
        (
            "a: {x: 1, x: 2}\nb: 1\n'b': 2\nb: 3\n",
            [
                "file.yaml:1: 'x' is given twice; it stands in line 1 already",
                "file.yaml:3: 'b' is given twice; it stands in line 2 already",
                "file.yaml:4: 'b' is given twice; it stands in line 2 already",
            ],
        ),
        (
            "a: &x 1\nb: *x\n",
            [
                "file.yaml:1: anchors ('&x') are not read; leave it out",
                "file.yaml:2: aliases ('*x') are not read; write the value out",
            ],
        ),
        (
            "a: &x {b: 1}\nc:\n  <<: *x\n",
            [
                "file.yaml:1: anchors ('&x') are not read; leave it out",
                "file.yaml:3: merge keys (<<) are not read; write the values out",
                "file.yaml:3: aliases ('*x') are not read; write the value out",
            ],
        ),
        ("*x : 1\n", ["file.yaml:1: aliases ('*x') are not read; write the value out"]),
        ("a: !!str 5\n", ["file.yaml:1: tags ('tag:yaml.org,2002:str') are not read; leave it out"]),
        ("a: !!python/object/apply:os.system [x]\n", None),
        ("a: ! 5\n", ["file.yaml:1: tags ('!') are not read; leave it out"]),
        ("a: !!map {b: 1}\n", ["file.yaml:1: tags ('tag:yaml.org,2002:map') are not read; leave it out"]),
        ("a:\nb: 1\n", ["file.yaml:1: 'a' has no value; give it one, or take the line out"]),
        ("a: ~\n", ["file.yaml:1: 'a' has no value; put quotes round '~' if it is meant as text"]),
        ("a: null\n", ["file.yaml:1: 'a' has no value; put quotes round 'null' if it is meant as text"]),
        ("a:\n  - 1\n  -\n", ["file.yaml:3: this list item is empty; give it a value or take it out"]),
        ("? [a, b]\n: 1\n", ["file.yaml:1: a list or mapping cannot be a key; a plain word is expected"]),
        ("{a: 1}: 2\n", ["file.yaml:1: a list or mapping cannot be a key; a plain word is expected"]),
        ("a: 1\n---\nb: 2\n", ["file.yaml:2: a second document begins here; a settings file holds one"]),
        ("", ["file.yaml: the file is empty; settings are expected"]),
        ("# only a remark\n", ["file.yaml: the file is empty; settings are expected"]),
        ("---\n", ["file.yaml: the file is empty; settings are expected"]),
        ("- 1\n- 2\n", ["file.yaml:1: keys with values are expected here, such as 'schema: 1'"]),
        ("\nword\n", ["file.yaml:2: keys with values are expected here, such as 'schema: 1'"]),
        ("!x word\n", ["file.yaml:1: tags ('!x') are not read; leave it out"]),
        ("a: 1\n\tb: 2\n", ["file.yaml:2: a tab stands here; indent with blanks"]),
        (
            "a: b: c\n",
            [
                "file.yaml:1: this is not valid YAML: a second ': ' stands in this line; put quotes round a text "
                "that holds one"
            ],
        ),
        ("a: 'b\n", ["file.yaml:2: this is not valid YAML: a quote is opened and never closed"]),
        ("a: [1, 2\n", None),
        ("a: 1\n b: 2\n", None),
        ("a\nb: 1\n", None),
        ('a: "\\q"\n', None),
        ("a: @b\n", None),
        ('a: "\\ud800"\n', ["file.yaml:1: half a character (a lone surrogate) stands here; plain text is expected"]),
    ],
)
def test_what_could_be_read_as_something_else_is_refused(text: str, expected: list[str] | None) -> None:
    found = faults(text)

    if expected is None:
        assert len(found) == 1
        assert found[0].startswith("file.yaml:")
    else:
        assert found == expected


@pytest.mark.parametrize("text", ['a: "\\UFFFFFFFF"\n', 'a: "\\U00110000"\n', f"%YAML 1.{'9' * 5000}\n---\na: 1\n"])
def test_codes_and_versions_beyond_all_bounds_are_faults_of_the_file(text: str) -> None:
    assert len(faults(text)) == 1


def test_a_refused_value_is_kept_from_further_complaints_but_the_rest_is_read() -> None:
    document = read_document("a: *x\nb: 1\n", "file.yaml")

    assert document.root is not None
    assert document.root.plain() == {"a": None, "b": 1}


def test_the_first_of_doubled_keys_stands() -> None:
    document = read_document("a: 1\na: {b: [2]}\nc: 3\n", "file.yaml")

    assert document.root is not None
    assert document.root.plain() == {"a": 1, "c": 3}


@pytest.mark.parametrize(
    ("content", "expected"),
    [
        (b"a: 1\nb: \xff\n", "file.yaml:2: this is not UTF-8 text; save the file as UTF-8"),
        ("a: 1\n".encode("utf-16"), "file.yaml:1: this is not UTF-8 text; save the file as UTF-8"),
        (b"a: 1\r\nb: 2\rc: \x00\n", "file.yaml:3: a control character (U+0000) stands here; plain text is expected"),
        ("a: \x85b\n", "file.yaml:1: a control character (U+0085) stands here; plain text is expected"),
        ("a: \u2028b\n", "file.yaml:1: a control character (U+2028) stands here; plain text is expected"),
        ("a: \x1b[31m\n", "file.yaml:1: a control character (U+001B) stands here; plain text is expected"),
        ("a: \ud800\n", "file.yaml:1: a control character (U+D800) stands here; plain text is expected"),
    ],
)
def test_bytes_that_are_no_text_are_named_with_their_line(content: bytes | str, expected: str) -> None:
    assert faults(content) == [expected]


def test_a_file_beyond_a_mebibyte_is_not_read() -> None:
    just_small_enough = b"a: 1 #" + b"x" * (LARGEST_FILE_BYTES - 6)

    assert faults(just_small_enough) == []
    assert faults(just_small_enough + b"x") == ["file.yaml: the file is larger than 1 MiB; a settings file is expected"]


@pytest.mark.parametrize("unit", ["[", "{a: ", "- ", "? "])
def test_deep_nesting_is_refused_at_once(unit: str) -> None:
    found = faults(unit * 3000)

    assert len(found) == 1
    assert "nested more than 20 deep" in found[0]


def test_a_file_of_very_many_values_is_refused(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(yaml_reader, "_MOST_NODES", 11)

    assert faults("a: [1, 2, 3, 4, 5, 6]\nb: 2\n") == []
    assert faults("a: [1, 2, 3, 4, 5, 6, 7, 8]\nb: 2\n") == [
        "file.yaml:2: the file has more than 11 values; a settings file is expected"
    ]


def test_an_alias_bomb_is_refused_alias_by_alias() -> None:
    text = "a: &a [x, x]\nb: &b [*a, *a]\nc: &c [*b, *b]\n"

    document = read_document(text, "file.yaml")

    assert len(document.faults) == 3 + 4
    assert isinstance(document.root, Mapping)
    assert document.root.plain() == {"a": ["x", "x"], "b": [None, None], "c": [None, None]}
