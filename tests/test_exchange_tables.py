"""CSV as people's spreadsheets write it: every oddity is a row of the table below."""

from __future__ import annotations

import codecs

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from planner.errors import RefusedLineError
from planner.exchange.tables import Column, Table, cell_text, protected, read_table, unprotected, write_table

COLUMNS = (
    Column("name", "a name", required=True, aliases=("who",)),
    Column("mass_kg", "kilograms", required=True),
    Column("note", "a note"),
)


def read(data: bytes) -> Table:
    return read_table(data, "file.csv", COLUMNS)


def cells(table: Table) -> list[tuple[str, ...]]:
    return [tuple(row.cells.get(column.name, "") for column in COLUMNS) for row in table.rows]


PLAIN = [("Ünä", "61.5", "a"), ("Bo", "70", "")]


@pytest.mark.parametrize(
    ("case", "data"),
    [
        ("plain", "name,mass_kg,note\nÜnä,61.5,a\nBo,70,\n".encode()),
        ("byte-order mark", codecs.BOM_UTF8 + "name,mass_kg,note\nÜnä,61.5,a\nBo,70,\n".encode()),
        ("UTF-16", "name,mass_kg,note\nÜnä,61.5,a\nBo,70,\n".encode("utf-16")),
        ("Windows-1252", "name,mass_kg,note\nÜnä,61.5,a\nBo,70,\n".encode("cp1252")),
        ("semicolon", "name;mass_kg;note\nÜnä;61.5;a\nBo;70;\n".encode()),
        ("tab", "name\tmass_kg\tnote\nÜnä\t61.5\ta\nBo\t70\t\n".encode()),
        ("carriage returns", "name,mass_kg,note\r\nÜnä,61.5,a\r\nBo,70,\r\n".encode()),
        ("old line ends", "name,mass_kg,note\rÜnä,61.5,a\rBo,70,\r".encode()),
        ("no last line end", "name,mass_kg,note\nÜnä,61.5,a\nBo,70,".encode()),
        ("other order", "note,mass_kg,name\na,61.5,Ünä\n,70,Bo\n".encode()),
        ("capitals and spaces in the header", "Who ,Mass kg, NOTE\nÜnä,61.5,a\nBo,70,\n".encode()),
        ("blank lines, blank cells", "\nname,mass_kg,note,,\n\nÜnä,61.5,a,,\n,,,,\n Bo , 70 ,\n".encode()),
        ("comments", "# made up\nname,mass_kg,note\n# one\nÜnä,61.5,a\n#,two\nBo,70,\n".encode()),
        ("quoted", '"name","mass_kg","note"\n"Ünä","61.5","a"\n"Bo","70",""\n'.encode()),
        ("short lines", "name,mass_kg,note\nÜnä,61.5,a\nBo,70\n".encode()),
        ("told separator", "sep=;\r\nname;mass_kg;note\r\nÜnä;61.5;a\r\nBo;70;\r\n".encode()),
        ("unknown column", "name,shoe,mass_kg,note\nÜnä,38,61.5,a\nBo,44,70,\n".encode()),
    ],
)
def test_reads_what_spreadsheets_write(case: str, data: bytes) -> None:
    table = read(data)
    assert cells(table) == PLAIN
    assert table.refused == ()


def test_says_what_it_ignored_and_what_it_guessed() -> None:
    assert read(b"name,shoe,,mass_kg\na,1,,2\n").notes == (
        "columns not known here and ignored: shoe, (column 3, no name)",
    )
    assert "Windows-1252" in read("name,mass_kg\nZoë,2\n".encode("cp1252")).notes[0]
    assert read("name,mass_kg\nZoë,2\n".encode()).notes == ()
    assert read(b"# made up\nname,mass_kg\n#7 Ana,2\n# one\nBo,3\n").notes == (
        "lines that start with # passed over as comments: 2",
    )


def test_counts_lines_as_an_editor_shows_them() -> None:
    table = read(b'# made up\n\nname,mass_kg,note\na,1,"two\nlines"\n# remark\nb,2,\n')
    assert [row.line for row in table.rows] == [4, 7]
    assert table.rows[0].cells["note"] == "two\nlines"


def test_a_hash_inside_a_quoted_cell_is_no_comment() -> None:
    assert read(b'name,mass_kg,note\na,1,"one\n# two"\n').rows[0].cells["note"] == "one\n# two"


def test_decimal_commas_need_another_separator() -> None:
    assert read(b"name;mass_kg\na;1,5\n").decimal_comma
    assert read(b"name\tmass_kg\na\t1,5\n").decimal_comma
    assert not read(b"name,mass_kg\na,1\n").decimal_comma


@pytest.mark.parametrize(
    ("data", "message"),
    [
        (b"", "line 1, column header: '' refused, expected a header line with the columns name, mass_kg"),
        (b"# only a remark\n\n", "expected a header line with the columns name, mass_kg; the file is empty"),
        (
            b"name,note\na,b\n",
            "line 1, column header: 'name, note' refused, expected the missing mass_kg as well",
        ),
        (b"# x\nfoo,bar\n1,2\n", "line 2, column header: 'foo,bar' refused, expected a header line"),
        (
            b"name,mass_kg,who\na,1,b\n",
            "column header: 'who' refused, expected one column name, there are two",
        ),
        (
            b"PK\x03\x04\x00\x00a workbook",
            "column file: 'PK.* refused, expected a text file: save the sheet as CSV",
        ),
        (b"x" * 200_000, r"column header: 'x{80}' refused, expected a header line"),
        (b"name,mass_kg\n\x81\xff\x8d,2\n", "column file: .* refused, expected a text file"),
    ],
)
def test_refuses_a_file_as_a_whole(data: bytes, message: str) -> None:
    with pytest.raises(RefusedLineError, match=message) as refusal:
        read(data)
    assert "\n" not in str(refusal.value)


def test_refuses_a_file_that_does_not_end(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("planner.exchange.tables.MOST_LINES", 3)
    assert len(read(b"name,mass_kg\n" + b"a,1\n" * 3).rows) == 3
    with pytest.raises(RefusedLineError, match=r"line 5, column file: .* at most 3 lines"):
        read(b"name,mass_kg\n" + b"a,1\n" * 4)


def test_refuses_single_lines_and_reads_on() -> None:
    table = read(b'name,mass_kg,note\na,1,b,surplus\n"c"d,2,\ne,3,\n')
    assert [row.cells["name"] for row in table.rows] == ["e"]
    assert [(fault.line, fault.field) for fault in table.refused] == [(2, "line"), (3, "line")]
    assert "3 cells as in the header" in str(table.refused[0])
    assert "quotation marks" in str(table.refused[1])


def test_an_open_quotation_mark_names_what_it_swallowed() -> None:
    table = read(b'name,mass_kg,note\na,1,\nb,2,"open\nc,3,\nd,4,\n')
    assert [row.cells["name"] for row in table.rows] == ["a"]
    (fault,) = table.refused
    assert fault.line == 3
    assert "swallowed everything to line 5" in str(fault)


@pytest.mark.parametrize("text", ["=1+1", "+44", "-x", "@me", "#1", "'=1", "''+", "\tx", "= "])
def test_no_text_is_written_as_a_formula_or_a_comment(text: str) -> None:
    written = protected(text)
    assert written.startswith("'")
    assert unprotected(written) == text


@pytest.mark.parametrize("text", ["'s Hof", "a=b", "", "'", "x-y", "''", "1-2"])
def test_harmless_text_is_written_as_it_is(text: str) -> None:
    assert protected(text) == text
    assert unprotected(text) == text


# Lone surrogates are no UTF-8 and null characters make a file binary: the store refuses both.
TEXT = st.text(st.characters(exclude_categories=("Cs",), exclude_characters="\0"), max_size=12)


def plain(text: str) -> str:
    """Text as it is kept in a file: nothing blank around it, one kind of line end."""
    return text.strip().replace("\r\n", "\n").replace("\r", "\n")


@given(st.lists(st.tuples(TEXT, TEXT), max_size=5))
@settings(max_examples=150, deadline=None)
def test_any_text_survives_writing_and_reading(rows: list[tuple[str, str]]) -> None:
    # A line without any text is a blank line: the mass keeps them apart.
    written = write_table(
        COLUMNS,
        [{"name": name, "note": note, "mass_kg": 1} for name, note in rows],
        "a heading\nof two lines",
    )
    cells_as_written = [cell for row in read(written).rows for cell in row.cells.values()]
    assert not any(cell.startswith(("=", "+", "-", "@")) for cell in cells_as_written)
    back = [(unprotected(row.cells["name"]), unprotected(row.cells["note"])) for row in read(written).rows]
    assert back == [(plain(name), plain(note)) for name, note in rows]


@given(st.floats(allow_nan=False, allow_infinity=False))
@settings(max_examples=100, deadline=None)
def test_numbers_keep_every_digit(number: float) -> None:
    assert float(cell_text(number)) == number
    assert "," not in cell_text(number)
