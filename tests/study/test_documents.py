"""What is refused before a word of a document is understood, whichever YAML parser is at hand."""

import pytest
import yaml

from assayfolio.study import document
from study.examples import SMALLEST, faults_of

CHECK = "check the indentation, quotation marks and brackets of this line and the one above"
COLON = (
    "put a text that holds a colon in quotation marks; check the indentation, and that every key above has a "
    "blank behind its colon"
)


@pytest.fixture(params=["libyaml", "python"])
def _parser(request: pytest.FixtureRequest, monkeypatch: pytest.MonkeyPatch) -> None:
    parsers = {"libyaml": yaml.CSafeLoader, "python": yaml.SafeLoader}
    monkeypatch.setattr(document, "_PARSER", parsers[request.param])


# The whole text and its one fault.
REFUSED: dict[str, tuple[str | bytes, str]] = {
    # bytes and characters
    "nothing": (b"", "1:1: the file is empty - write the compulsory keys"),
    "nothing but a comment": (b"# soon", "1:1: the file is empty - write the compulsory keys"),
    "Latin-1": (b"study: A\ntitle: \xb5g", "2:8: the byte 0xB5 is not UTF-8 text - save the file as UTF-8"),
    "UTF-16": ("study: A".encode("utf-16"), "1:1: the byte 0xFF is not UTF-8 text - save the file as UTF-8"),
    "a NUL": (
        b"study: A\x00\n",
        "1:9: the character U+0000 (control character) is not allowed - delete it; it cannot be seen",
    ),
    "a bell in a comment": (
        b"study: A # \x07\n",
        "1:12: the character U+0007 (control character) is not allowed - delete it; it cannot be seen",
    ),
    "a change of direction": (
        "# é\ntitle: a\u202eb\n",
        "2:9: the character U+202E RIGHT-TO-LEFT OVERRIDE is not allowed - delete it; it cannot be seen",
    ),
    "an isolated direction": (
        "title: a\u2067b\n",
        "1:9: the character U+2067 RIGHT-TO-LEFT ISOLATE is not allowed - delete it; it cannot be seen",
    ),
    "a second byte order mark": (
        b"\xef\xbb\xbf\xef\xbb\xbfstudy: A\n",
        "1:1: the character U+FEFF ZERO WIDTH NO-BREAK SPACE is not allowed - delete it; it cannot be seen",
    ),
    "a line separator": (
        "title: a\u2028study: b\n",
        "1:9: the character U+2028 LINE SEPARATOR is not allowed - delete it; it cannot be seen",
    ),
    "a next-line character": (
        "title: a\u0085study: b\n",
        "1:9: the character U+0085 (control character) is not allowed - delete it; it cannot be seen",
    ),
    "a tab as indentation": (
        "data:\n\tfile: a.csv\n",
        "2:1: the line begins with a tab - indent with blanks",
    ),
    "a tab behind blanks": (
        "data:\n  \tfile: a.csv\n",
        "2:3: the line begins with a tab - indent with blanks",
    ),
    # parts of YAML that hide what a text means
    "a second document": (
        "study: A\n---\nstudy: B\n",
        "2:1: a second document begins here - keep one document a file, without `---`",
    ),
    "a version directive": (
        "%YAML 1.2\n---\nstudy: A\n",
        "1:1: a YAML directive is not allowed - delete the line that begins with %",
    ),
    "a tag directive behind a comment": (
        "# mine\n\n%TAG ! tag:x,2020:\n---\nstudy: A\n",
        "3:1: a YAML directive is not allowed - delete the line that begins with %",
    ),
    # YAML that cannot be read
    "an open double quotation mark": (
        'study: A\ntitle: "Two balances\nalpha: 1\n',
        "2:8: the quotation mark that opens here is never closed - put the same mark behind the text",
    ),
    "an open single quotation mark": (
        "title: 'Two balances\n",
        "1:8: the quotation mark that opens here is never closed - put the same mark behind the text",
    ),
    "a text behind a quoted one": (
        'study: A\ntitle: "Two" balances\n',
        f"2:14: this does not fit the lines above it - {CHECK}",
    ),
    "an open list": (
        "levels: [a, b\nalpha: 1\n",
        (
            "1:9: the list that opens here with `[` is not closed, or lacks a comma - "
            "separate the items with commas and end with `]`"
        ),
    ),
    "an open mapping": (
        "checks: {a: b\nalpha: 1\n",
        (
            "1:9: the mapping that opens here with `{` is not closed, or lacks a comma - "
            "separate the entries with commas and end with `}`"
        ),
    ),
    "a colon inside a text": (
        "study: A\ntitle: Water: two methods\n",
        f"2:13: a colon stands where no value can begin - {COLON}",
    ),
    "a key without a blank behind the colon": (
        "study:A\ntitle: B\n",
        f"2:6: a colon stands where no value can begin - {COLON}",
    ),
    "a line that is no key": (
        "study: A\nwater\ntitle: B\n",
        (
            "2:1: this is not of the form `key: value` - "
            "put a colon and a blank behind the key, or indent the line if it continues the one above"
        ),
    ),
    "crooked indentation": (
        "data:\n    file: a\n  factor: b\n",
        f"3:3: this does not fit the lines above it - {CHECK}",
    ),
    "a list behind its key": (
        "levels: - a\n",
        (
            "1:9: a list begins behind a key on the same line - "
            "begin the list on a line of its own, or write it as [a, b]"
        ),
    ),
    "a question mark as value": (
        "title: ? why\n",
        "1:8: a question mark and a blank cannot begin a value - put the text in quotation marks",
    ),
    "an at sign": (
        "unit: @\n",
        "1:7: a value cannot begin with this character - put the text in quotation marks",
    ),
    "a percent sign": (
        "unit: %\n",
        "1:7: a value cannot begin with this character - put the text in quotation marks",
    ),
    "a text on the line of the bar": (
        "purpose: | to see\n  more\n",
        "1:12: nothing may stand behind `|` or `>` on its line - begin the text on the next line",
    ),
    "a bracket without a partner": ("unit: ]\n", f"1:7: a value is missing before this - {CHECK}"),
    "a lone asterisk": (
        "unit: *\n",
        (
            "1:7: an anchor (`&...`) or alias (`*...`) is not allowed - "
            "write the value out; put a text that begins with `&` or `*` in quotation marks"
        ),
    ),
    "an unknown tag": (
        "unit: !x!y mg\n",
        "1:7: a tag (`!...`) is not allowed - delete it; put a text that begins with `!` in quotation marks",
    ),
    # documents that are no definition
    "a word": (
        "study",
        (
            "1:1: the file is no mapping of keys to values - "
            "write lines such as `study: ...`, with a blank behind the colon"
        ),
    ),
    "a list": (
        "- study: A\n",
        (
            "1:1: the file is no mapping of keys to values - "
            "write lines such as `study: ...`, with a blank behind the colon"
        ),
    ),
}


@pytest.mark.usefixtures("_parser")
@pytest.mark.parametrize(("text", "fault"), REFUSED.values(), ids=REFUSED.keys())
def test_a_document_is_refused_in_plain_words(text: str | bytes, fault: str) -> None:
    assert faults_of(text) == [fault]


@pytest.mark.usefixtures("_parser")
@pytest.mark.parametrize("escape", ["\\q", "\\x0g", "\\UFFFFFFFF"])
def test_an_unknown_escape_is_refused(escape: str) -> None:
    (fault,) = faults_of(f'title: "{escape}"\n')
    assert fault.endswith(
        "the backslash in this text begins no known escape - "
        "use single quotation marks, or write the backslash twice"
    )


# What is put behind the smallest definition (from line 8 on), and the one fault: the rest is still read.
HIDDEN_MEANING = {
    "an anchor": (
        "purpose: &p because\n",
        "8:10: an anchor (`&p`) is not allowed - write the values out",
    ),
    "an alias": (
        "purpose: *p\n",
        "8:10: an alias (`*p`) is not allowed - write the values out",
    ),
    "an alias for a section": (
        "checks: *c\n",
        "8:9: an alias (`*c`) is not allowed - write the values out",
    ),
    "a tag for text": ("purpose: !!str 1\n", "8:10: a tag (`!!str`) is not allowed - delete the tag"),
    "a tag of one's own": ("purpose: !why 1\n", "8:10: a tag (`!why`) is not allowed - delete the tag"),
    "a tag that names code": (
        "purpose: !!python/object/apply:os.system [ls]\n",
        "8:10: a tag (`!!python/object/apply:os.system`) is not allowed - delete the tag",
    ),
    "a merge key": ("<<: {purpose: p}\n", "8:1: a merge key (`<<`) is not allowed - write the values out"),
    "a key twice": (
        "title: Another\n",
        "8:1: the key `title` stands here a second time - the first is on line 2; keep one of them",
    ),
    "a quoted key twice": (
        '"title": Another\n',
        "8:1: the key `title` stands here a second time - the first is on line 2; keep one of them",
    ),
    "a key twice in braces": (
        "checks: {normality: shapiro-wilk, normality: shapiro-wilk}\n",
        "8:35: the key `normality` stands here a second time - the first is on line 8; keep one of them",
    ),
    "a list as key": ("? [a, b]\n: c\n", "8:3: a list or mapping cannot be a key - write a word as key"),
    "no key": ("? \n: c\n", "8:2: a key is missing before the colon - write the key"),
}


@pytest.mark.usefixtures("_parser")
@pytest.mark.parametrize(("text", "fault"), HIDDEN_MEANING.values(), ids=HIDDEN_MEANING.keys())
def test_what_hides_its_meaning_is_refused_and_the_rest_is_read(text: str, fault: str) -> None:
    (first, *rest) = faults_of(SMALLEST + text + "colour: red\n")
    assert first == fault
    assert [other.partition(" - ")[0] for other in rest if "colour" in other] == [
        f"{SMALLEST.count(chr(10)) + text.count(chr(10)) + 1}:1: the key `colour` is not known here"
    ]


def test_every_invisible_character_and_tab_shows_in_one_pass() -> None:
    faults = faults_of(b"study: A\x01\n\ttitle: B\x02\n%C\n")
    assert [fault.partition(": ")[0] for fault in faults] == ["1:9", "2:1", "2:10"]


def test_quoted_words_are_texts_even_if_they_look_special() -> None:
    assert faults_of(SMALLEST.replace("Two balances and a reference", '"*not an alias"')) == []
    assert faults_of(SMALLEST.replace("Two balances and a reference", '"null"')) == []


def test_a_file_of_more_than_a_megabyte_is_not_read() -> None:
    from assayfolio.errors import StudyError
    from assayfolio.study.reading import read_study

    with pytest.raises(StudyError) as refusal:
        read_study(SMALLEST.encode() + b"#" * 1_000_000, "plan.yaml")
    size = len(SMALLEST) + 1_000_000
    assert [str(fault) for fault in refusal.value.faults] == [
        f"plan.yaml: the file has {size} bytes - at most 1000000 are read; is it the right file?"
    ]


@pytest.mark.usefixtures("_parser")
@pytest.mark.parametrize("levels", [32, 33])
def test_values_may_be_nested_as_deep_as_32(levels: int) -> None:
    deep = "[" * (levels - 1) + "]" * (levels - 1)
    faults = faults_of(f"{SMALLEST}purpose: {deep}\n")
    if levels == 32:
        assert faults == ["8:10: `purpose` is a list - expected text of at most 4000 characters"]
    else:
        assert faults == ["8:41: values are nested more than 32 deep - write it flatter"]


BOMBS = {
    "open brackets": b"[" * 400_000,
    "open braces": b"{a: " * 200_000,
    "hyphens": b"- " * 400_000,
    "question marks": b"? " * 400_000,
    "a thousand laughs": b"a: &a [x, x]\n"
    + b"".join(b"%c: &%c [*%c, *%c]\n" % (n + 1, n + 1, n, n) for n in range(ord("a"), ord("k"))),
}


@pytest.mark.parametrize("content", BOMBS.values(), ids=BOMBS.keys())
def test_a_document_made_to_exhaust_a_reader_is_refused(content: bytes) -> None:
    assert any("deep" in fault or "is not allowed" in fault for fault in faults_of(content))


def test_ten_thousand_values_are_enough() -> None:
    text = "study: A\n" + "purpose: [" + "x, " * 10_000 + "]\n"
    assert faults_of(text) == ["2:29996: the file holds more than 10000 values - is it the right file?"]
