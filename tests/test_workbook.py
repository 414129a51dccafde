"""Workbooks, written by openpyxl and odfpy (libraries of general use) and by hand, read by our reader."""

from __future__ import annotations

import csv
import io
import zipfile
from datetime import date
from pathlib import Path

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from checker import limits, plugins
from checker.api import verify
from checker.errors import InputError
from checker.files import Blob, decoded
from checker.files import read as read_file
from checker.readers import bom_table, workbook
from checker.readers.workbook_sheet import Room, Sheet, number, place

openpyxl = pytest.importorskip("openpyxl")
odf_document = pytest.importorskip("odf.opendocument")
from odf import table as odf_table  # noqa: E402
from odf import teletype  # noqa: E402
from odf import text as odf_text  # noqa: E402

ROOT = Path(__file__).resolve().parents[1]
SAMPLES = ROOT.parent / "shared" / "samples"
BOMS = ROOT / "fixtures" / "readers" / "bom"
GREENHOUSE = ROOT / "fixtures" / "designs" / "greenhouse"
ROWS = [["Reference", "Value", "Voltage"], ["C1", "100n", "50 V"], ["R1, R2", "4k7", ""]]


def xlsx(*sheets, change=None):
    """A workbook of lists of rows, the first sheet called S1. change: a function that gets the openpyxl book before it is saved."""
    book = openpyxl.Workbook()
    book.remove(book.active)
    for at, rows in enumerate(sheets, 1):
        sheet = book.create_sheet(f"S{at}")
        for row in rows:
            sheet.append(row)
    if change:
        change(book)
    stream = io.BytesIO()
    book.save(stream)
    return stream.getvalue()


def ods(*sheets):
    """The same as OpenDocument; a cell may be text, a figure, or a ready element."""
    document = odf_document.OpenDocumentSpreadsheet()
    for at, rows in enumerate(sheets, 1):
        sheet = odf_table.Table(name=f"S{at}")
        for row in rows:
            line = odf_table.TableRow()
            for cell in row:
                line.addElement(odf_cell(cell))
            sheet.addElement(line)
        document.spreadsheet.addElement(sheet)
    stream = io.BytesIO()
    document.write(stream)
    return stream.getvalue()


def odf_cell(value, **more):
    if not isinstance(value, (str, int, float)):
        return value
    if isinstance(value, str):
        cell = odf_table.TableCell(valuetype="string", **more)
    else:
        cell = odf_table.TableCell(valuetype="float", value=str(value), **more)
    for line in str(value).split("\n"):
        paragraph = odf_text.P()
        teletype.addTextToElement(paragraph, line)
        cell.addElement(paragraph)
    return cell


def read(data, name="bom.xlsx"):
    return workbook.READER.read(Blob(name, data))


def told(reading):
    """[(references, {attribute: value})] of each row."""
    return [(row.refs, {fact.attribute: fact.value for fact in row.facts}) for row in reading.rows]


def notes(reading):
    return [note.text for note in reading.notes]


def members(data, **changes):
    """The zip once more, with members replaced, added, or taken out (None)."""
    out = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(data)) as old, zipfile.ZipFile(out, "w", zipfile.ZIP_DEFLATED) as new:
        for name in old.namelist():
            if name not in changes:
                new.writestr(name, old.read(name))
        for name, content in changes.items():
            if content is not None:
                new.writestr(name, content)
    return out.getvalue()


@pytest.mark.parametrize("write", [xlsx, ods])
def test_a_plain_list(write):
    reading = read(write(ROWS))
    assert (reading.role, reading.form, notes(reading)) == ("bom", "XLSX or ODS workbook", [])
    assert told(reading) == [(("C1",), {"value": "100n", "rating:voltage": "50 V"}), (("R1", "R2"), {"value": "4k7"})]
    assert [str(row.source) for row in reading.rows] == ["bom.xlsx, sheet S1, row 2", "bom.xlsx, sheet S1, row 3"]
    places = [(fact.source.path, fact.source.line, fact.source.column, fact.source.cell) for fact in reading.rows[0].facts]
    assert places == [("bom.xlsx", 2, 2, "S1!B2"), ("bom.xlsx", 2, 3, "S1!C2")]
    assert reading.rows[0].source.cell == "S1!2:2"
    assert plugins.reader_for(Blob("x", write(ROWS)), "bom") is workbook.READER


@pytest.mark.parametrize("write", [xlsx, ods])
def test_the_demo_gets_the_same_verdicts_from_a_workbook(write, tmp_path):
    rows = list(csv.reader(io.StringIO((GREENHOUSE / "bom.csv").read_text(encoding="utf-8"))))
    path = tmp_path / "bom"
    path.write_bytes(write(rows))
    reports = [
        verify(GREENHOUSE / "greenhouse.net", bom=[bom], declaration=GREENHOUSE / "declaration.yaml")
        for bom in (GREENHOUSE / "bom.csv", path)
    ]
    one, two = ([(v.fingerprint, v.outcome, v.because) for v in report.verdicts] for report in reports)
    assert one == two


@pytest.mark.skipif(not SAMPLES.is_dir(), reason="the sample boards are not beside this checkout")
@pytest.mark.parametrize(("board", "rows"), [("can-adapter", 17), ("no-barrier", 25)])
def test_workbooks_of_real_boards_hold_what_the_library_sees(board, rows):
    path = SAMPLES / board / "bom.xlsx"
    reading = read(read_file(path).data)
    assert len(reading.rows) == rows
    for row in reading.rows:
        assert [fact.value for fact in row.facts if fact.attribute == "quantity"] == [float(len(row.refs))]
    (sheet,) = openpyxl.load_workbook(path, data_only=True).worksheets
    for fact in (fact for row in reading.rows for fact in row.facts):
        cell = sheet.cell(fact.source.line, fact.source.column)
        assert fact.source.cell.rpartition("!")[2] == cell.coordinate
        assert str(fact.text or fact.value) in str(cell.value)


# --- where the list is -----------------------------------------------------------------------------------------------


@pytest.mark.parametrize("write", [xlsx, ods])
def test_a_header_in_the_fortieth_row_of_the_second_sheet(write):
    above = [["Board", "12"], ["Author", "somebody"], *[["", ""]] * 37]
    reading = read(write([["Project", "greenhouse"]], [*above, *ROWS]))
    assert told(reading)[0][0] == ("C1",)
    assert reading.rows[0].source.line == 41
    assert notes(reading) == ["sheets without a list of parts, left out: 1 (S1)"]


@pytest.mark.parametrize("write", [xlsx, ods])
def test_parts_on_two_sheets_name_their_sheet(write):
    reading = read(write(ROWS, [ROWS[0], ["U1", "817", ""]]))
    assert [(row.refs[0], row.source.cell, row.table) for row in reading.rows] == [
        ("C1", "S1!2:2", ""),
        ("R1", "S1!3:3", ""),
        ("U1", "S2!2:2", ""),
    ]
    assert notes(reading) == []


@pytest.mark.parametrize("write", [xlsx, ods])
def test_a_sheet_that_lists_the_same_parts_again_is_left_out(write):
    reading = read(write(ROWS, [["Ref", "Description"], ["C1", "was 220n"], ["R1", "new"]]))
    assert [row.source.cell for row in reading.rows] == ["S1!2:2", "S1!3:3"]
    assert notes(reading) == ["sheet S2 lists parts of sheet S1 again and is left out"]


@pytest.mark.parametrize("write", [xlsx, ods])
def test_a_sheet_that_says_more_of_the_same_parts_is_read(write):
    reading = read(write(ROWS, [["Ref", "Value", "Class"], ["C1", "100n", "Y2"]]))
    assert told(reading)[2] == (("C1",), {"value": "100n", "mark": "Y2"})
    assert ({row.table for row in reading.rows}, notes(reading)) == ({""}, [])


@pytest.mark.parametrize("write", [xlsx, ods])
def test_sheets_that_contradict_each_other_are_tables_called_as_the_sheets(write):
    reading = read(write(ROWS, [ROWS[0], ["C1", "220n", ""]], [ROWS[0], ["U1", "817", ""]]))
    assert [(row.refs[0], row.table) for row in reading.rows] == [("C1", "S1"), ("R1", "S1"), ("C1", "S2"), ("U1", "")]


def test_a_sheet_called_dnp_leaves_its_parts_out():
    def name(book):
        book["S2"].title = "DNP"

    reading = read(xlsx(ROWS, [ROWS[0], ["U1", "817", ""]], change=name))
    assert [(row.refs[0], [fact.value for fact in row.facts if fact.attribute == "fitted"]) for row in reading.rows] == [
        ("C1", []),
        ("R1", []),
        ("U1", [False]),
    ]


def test_variants_of_several_sheets_are_one():
    header = ["Ref", "Value", "Qty EU", "Qty US"]
    reading = read(xlsx([header, ["C1", "1u", 1, 0]], [header, ["R1", "1k", 0, 1]]))
    assert [(v.name, v.fitted, v.not_fitted) for v in reading.variants] == [("EU", ("C1",), ("R1",)), ("US", ("R1",), ("C1",))]


def test_hidden_sheets_and_hidden_rows():
    def hide(book):
        book["S2"].sheet_state = "hidden"
        book["S1"].row_dimensions[3].hidden = True

    reading = read(xlsx(ROWS, [ROWS[0], ["U1", "817", ""]], change=hide))
    assert [row.refs for row in reading.rows] == [("C1",), ("R1", "R2")]
    assert notes(reading) == [
        "sheets that are not shown and list parts, left out: 1 (S2)",
        "sheet S1: rows that are not shown and count all the same: 1 (3)",
    ]


# --- cells -----------------------------------------------------------------------------------------------------------


def test_figures_formats_dates_and_formulas():
    def dress(book):
        sheet = book["S1"]
        sheet["B2"].number_format = '0" V"'
        sheet["C2"].number_format = "0.0%"
        sheet["D2"] = date(2024, 3, 1)
        sheet["E2"] = "=B2*2"

    header = ["Reference", "Value", "Tolerance", "MPN", "Voltage", "Qty"]
    reading = read(xlsx([header, ["C1", 12, 0.05, "", "", 1.0]], change=dress))
    assert told(reading) == [(("C1",), {"value": "12 V", "tolerance": "5%", "type": "2024-03-01", "quantity": 1.0})]
    assert notes(reading) == [
        "sheet S1: formulas without a stored value, taken as empty: 1 (E2)",
        "sheet S1: cells that hold a date, which may have been typed as something else: 1 (D2)",
    ]


def test_cells_merged_downwards_hold_in_each_row():
    def merge(book):
        book["S1"].merge_cells("B2:B3")

    found = told(read(xlsx([ROWS[0], ["C1", "100n", "50 V"], ["C2", "", "25 V"]], change=merge)))
    assert [facts["value"] for _, facts in found] == ["100n", "100n"]
    spanned = odf_cell("100n", numberrowsspanned="2")
    rows = [ROWS[0], ["C1", spanned, "50 V"], ["C2", odf_table.CoveredTableCell(), "25 V"]]
    assert [facts["value"] for _, facts in told(read(ods(rows)))] == ["100n", "100n"]


def test_runs_of_rich_text_and_readings_beside_them():
    strings = ["Reference", "Value", "<r><t>C</t></r><r><rPr><b/></rPr><t>1</t></r><rPh sb='0' eb='1'><t>no</t></rPh>", "a_x0041_b"]
    data = shared(strings, "".join(f'<row><c t="s"><v>{at}</v></c><c t="s"><v>{at + 1}</v></c></row>' for at in (0, 2)))
    assert told(read(data)) == [(("C1",), {"value": "aAb"})]


def test_repeated_rows_cells_blanks_and_units_of_opendocument():
    twice = odf_table.TableCell(valuetype="string", numbercolumnsrepeated="2")
    twice.addElement(odf_text.P(text="x"))
    blanks = odf_table.TableCell(valuetype="string")
    paragraph = odf_text.P(text="100n")
    paragraph.addElement(odf_text.S(c=2))
    paragraph.addText("X7R")
    blanks.addElement(paragraph)
    unit = odf_table.TableCell(valuetype="float", value="50")
    unit.addElement(odf_text.P(text="50 V"))
    reading = read(ods([["Reference", "Description", "Voltage", "A", "B"], ["C1", blanks, unit, twice]]))
    facts = told(reading)[0][1]
    assert (facts["description"], facts["rating:voltage"]) == ("100n  X7R", "50 V")
    assert (facts["field:A"], facts["field:B"]) == ("x", "x")


@pytest.mark.parametrize(
    ("stored", "shown"),
    [
        ("100", "100"),
        ("4.7000000000000004E-7", "4.7E-7"),
        ("0.00047", "0.00047"),
        ("4700.0", "4700"),
        ("0", "0"),
        ("-0.5", "-0.5"),
        ("1E+40", "1E+40"),
    ],
)
def test_figures_are_written_without_noise(stored, shown):
    assert number(stored) == shown
    assert number("0.05", percent=True) == "5%"
    assert number("4.7000000000000004E-7", " F") == "0.00000047 F"  # E and a unit read like another figure
    assert number("-0") == "0"
    assert number("nan") == "nan"


def test_places():
    assert [place(7, column) for column in (1, 26, 27, 702, 703)] == ["A7", "Z7", "AA7", "ZZ7", "AAA7"]


# --- strangers -------------------------------------------------------------------------------------------------------

PLAIN = xlsx(ROWS)
SHEET = "xl/worksheets/sheet1.xml"
STRINGS = "xl/sharedStrings.xml"
LINKS = "xl/_rels/workbook.xml.rels"
MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"


def sheet_of(cells):
    return f'<worksheet xmlns="{MAIN}"><sheetData>{cells}</sheetData></worksheet>'


def shared(strings, rows):
    """A workbook of ready rows whose cells name shared strings, each a text or ready runs."""
    items = "".join(f"<si>{text if text.startswith('<') else f'<t>{text}</t>'}</si>" for text in strings)
    with zipfile.ZipFile(io.BytesIO(PLAIN)) as old:
        links = old.read(LINKS).decode()
    kind = "http://purl.oclc.org/ooxml/officeDocument/relationships/sharedStrings"
    link = f'<Relationship Id="rId9" Type="{kind}" Target="sharedStrings.xml"/>'
    links = links.replace("</Relationships>", f"{link}</Relationships>")
    return members(PLAIN, **{LINKS: links, STRINGS: f'<sst xmlns="{MAIN}">{items}</sst>', SHEET: sheet_of(rows)})


def refused(data, message, name="bom.xlsx"):
    with pytest.raises(InputError) as caught:
        read(data, name)
    assert message in str(caught.value)


def test_a_zip_of_something_else_and_no_zip():
    refused(members(PLAIN, **{"xl/workbook.xml": None}), "the zip file is no workbook")
    refused(b"Reference,Value\nR1,1k\n", "this is no workbook; found a delimited table")
    refused(PLAIN[:-200], "the workbook is damaged")
    old = Blob("bom.xlsx", b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + bytes(200))
    with pytest.raises(InputError, match=r"old binary form, or one with a password\. Save it as XLSX, ODS or CSV"):
        plugins.reader_for(old, "bom").read(old)


def test_empty_workbooks_and_workbooks_without_a_list():
    refused(xlsx([]), "the bill of materials is empty")
    refused(xlsx([["Board", "1"], ["Author", "x"]]), "header")
    refused(xlsx([ROWS[0]]), "the table has a header but no rows")
    assert len(read(xlsx([ROWS[0]], ROWS)).rows) == 2


def test_bombs():
    refused(members(PLAIN, **{"xl/big.xml": b" " * (limits.ZIP_MEMBER_BYTES + 1)}), "is too large")
    refused(members(PLAIN, **{"xl/big.xml": b" " * (8 * 2**20)}), "unpacks to far more than it should")
    refused(members(PLAIN, **{f"x/{at}": "" for at in range(limits.ZIP_MEMBERS)}), "too many files")


@pytest.mark.parametrize("name", ["../x.xml", "/etc/x", "xl\\..\\x", "c:/x"])
def test_members_that_lead_outside(name):
    refused(members(PLAIN, **{name: "x"}), "leads outside")


def test_a_member_twice():
    out = io.BytesIO()
    with zipfile.ZipFile(out, "w") as file:
        file.writestr("content.xml", "<a/>")
        with pytest.warns(UserWarning, match="Duplicate name"):
            file.writestr("content.xml", "<b/>")
    refused(out.getvalue(), "holds a file twice")


def test_locked_workbooks():
    data = bytearray(PLAIN)
    for mark, offset in ((b"PK\x03\x04", 6), (b"PK\x01\x02", 8)):
        at = data.find(mark)
        while at >= 0:
            data[at + offset] |= 1
            at = data.find(mark, at + 4)
    refused(bytes(data), "locked with a password")
    refused(members(ods(ROWS), **{"META-INF/manifest.xml": "<m><encryption-data/></m>"}), "locked with a password")


def test_cells_far_from_the_others():
    near = '<row r="1"><c r="A1" t="inlineStr"><is><t>Reference</t></is></c></row>'
    far = near + '<row r="1048576"><c r="XFD1048576"><v>1</v></c></row>'
    refused(members(PLAIN, **{SHEET: sheet_of(far)}), "too many columns")
    blank = far.replace("<v>1</v>", "")
    refused(members(PLAIN, **{SHEET: sheet_of(blank)}), "header")
    many = odf_table.TableCell(valuetype="string", numbercolumnsrepeated="16384")
    many.addElement(odf_text.P(text="x"))
    refused(ods([[*ROWS[0], many], *ROWS[1:]]), "too many columns")
    rows = odf_table.TableRow(numberrowsrepeated="1048576")
    rows.addElement(odf_cell("x"))
    document = odf_document.OpenDocumentSpreadsheet()
    sheet = odf_table.Table(name="S1")
    sheet.addElement(rows)
    document.spreadsheet.addElement(sheet)
    stream = io.BytesIO()
    document.write(stream)
    refused(stream.getvalue(), "rows")


def test_entities_document_types_and_links_are_not_followed(tmp_path):
    (tmp_path / "secret").write_text("SECRET", encoding="utf-8")
    for kind in (f'<!DOCTYPE a [<!ENTITY x SYSTEM "file://{tmp_path}/secret">]>', '<!DOCTYPE a [<!ENTITY x "y">]>'):
        cells = '<row r="1"><c r="A1" t="inlineStr"><is><t>&x;</t></is></c></row>'
        refused(members(PLAIN, **{SHEET: kind + sheet_of(cells)}), "document type")
    relations = (
        '<Relationships xmlns="http://schemas.openxmlformats.org/package/2006/relationships">'
        f'<Relationship Id="rId1" Target="file://{tmp_path}/secret" TargetMode="External"/></Relationships>'
    )
    refused(members(PLAIN, **{"xl/_rels/workbook.xml.rels": relations}), "the workbook lacks one of its files; expected sheet S1")


def test_a_cell_that_names_no_text():
    cells = '<row r="1"><c r="A1" t="s"><v>99</v></c></row>'
    refused(members(PLAIN, **{SHEET: sheet_of(cells)}), "a text the workbook does not hold")
    refused(members(PLAIN, **{SHEET: "<worksheet"}), "is no XML")
    refused(members(PLAIN, **{SHEET: None}), "the workbook lacks one of its files; expected sheet S1")


# --- what the two libraries do not write ------------------------------------------------------------------------------


def inline(*rows, after=""):
    """A sheet of XLSX from rows of ready cells, each a text or the inside of a `c` element."""
    lines = []
    for row in rows:
        cells = (cell if cell.startswith("<c") else f'<c t="inlineStr"><is><t>{cell}</t></is></c>' for cell in row)
        lines.append(f"<row>{''.join(cells)}</row>")
    return members(PLAIN, **{SHEET: sheet_of("".join(lines)).replace("</worksheet>", f"{after}</worksheet>")})


def test_cells_without_a_place_follow_each_other():
    assert told(read(inline(["Ref", "Value"], ["C1", "100n"]))) == [(("C1",), {"value": "100n"})]


@pytest.mark.parametrize(
    ("cell", "value"),
    [
        ("<c><v>4.7E-7</v></c>", "4.7E-7"),
        ("<c t='n'><v> 100.0 </v></c>", "100"),
        ("<c t='str'><f>A1</f><v>10k</v></c>", "10k"),
        ("<c t='b'><v>1</v></c>", "yes"),
        ("<c t='d'><v>2024-03-01</v></c>", "2024-03-01"),
        ("<c t='inlineStr'><is><r><t>1</t></r><r><t xml:space='preserve'>0 k</t></r></is></c>", "10 k"),
        ("<c t='inlineStr'><is><t>a_x000D_&#10;b_x0041__xD800__x0000_</t></is></c>", "a\nbA_xD800__x0000_"),
        ("<c t='e'><v>#N/A</v></c>", None),
        ("<c t='e'><f>NA()</f><v>#N/A</v></c>", None),
        ("<c><f>1+1</f></c>", None),
        ("<c><f>1+1</f><v></v></c>", None),
        ("<c t='str'><f>IF(1,&quot;&quot;)</f><v></v></c>", None),
        ("<c/>", None),
    ],
)
def test_values_of_cells(cell, value):
    reading = read(inline(["Ref", "Value", "MPN"], ["C1", cell, "X1"]))
    assert told(reading)[0][1].get("value") == value
    lost = "unstored" if "1+1" in cell else "error" if "#N/A" in cell else "date" if "t='d'" in cell else ""
    words = {"unstored": "formulas without a stored value", "error": "cells that hold an error", "date": "cells that hold a date"}
    assert [words[lost] in note for note in notes(reading)] == ([True] if lost else [])


@pytest.mark.parametrize(
    ("code", "stored", "value"),
    [
        ('0.0" V"', 4.7, "4.7 V"),
        ('#,##0\\ "V"', 1000, "1000 V"),
        ('0.0,"k"', 4700, "4700"),
        ('[>=1000]0.0,"k";0"R"', 4700, "4700"),
        ('0" %"', 5, "5 %"),
        ("0.00E+00", 4.7e-7, "4.7E-7"),
        ('0" F"', 4.7e-7, "0.00000047 F"),
        ("General", 100, "100"),
        ("0%", 0.05, "5%"),
        ("yyyy-mm-dd", 45352, "2024-03-01"),
        ("[h]:mm", -1, "-1"),
        ("yyyy", 1e12, "1000000000000"),
    ],
)
def test_formats_of_figures(code, stored, value):
    def dress(book):
        book["S1"]["B2"].number_format = code

    assert told(read(xlsx([["Ref", "Value", "Qty"], ["C1", stored, 1]], change=dress)))[0][1]["value"] == value


@pytest.mark.parametrize(
    ("stored", "seen", "value"),
    [
        ("50", "50 V", "50 V"),
        ("4.7", "4,70 V", "4.7 V"),
        ("1000", "1,000 V", "1000 V"),
        ("1000.5", "1.000,5 V", "1000.5 V"),
        ("4.73", "4.7 V", "4.73 V"),
        ("4700", "4.7k", "4.7k"),
        ("4.7E-7", "4.7E-07", "4.7E-7"),
        ("0.5", "€ 0.50", "0.5"),
    ],
)
def test_figures_of_opendocument_keep_the_unit_that_is_shown(stored, seen, value):
    cell = odf_table.TableCell(valuetype="float", value=stored)
    cell.addElement(odf_text.P(text=seen))
    assert told(read(ods([["Ref", "Value"], ["C1", cell]])))[0][1]["value"] == value


def test_values_of_opendocument():
    def cell(text="", **said):
        made = odf_table.TableCell(**said)
        if text:
            made.addElement(odf_text.P(text=text))
        return made

    header = ["Ref", "Value", "Tolerance", "Fit", "MPN", "Description", "Voltage"]
    row = [
        "C1",
        cell("#N/A", valuetype="string", formula="of:=NA()"),
        cell("5,0 %", valuetype="percentage", value="0.05"),
        cell("TRUE", valuetype="boolean", booleanvalue="true"),
        cell("01.03.24", valuetype="date", datevalue="2024-03-01T00:00:00"),
        cell("a\n   b", valuetype="string"),
        cell(formula="of:=[.A1]*2"),
    ]
    reading = read(ods([header, row]))
    wanted = {"tolerance": "5%", "fitted": True, "type": "2024-03-01", "description": "a b"}
    assert told(reading) == [(("C1",), wanted)]
    assert notes(reading) == [
        "sheet S1: formulas without a stored value, taken as empty: 1 (G2)",
        "sheet S1: cells that hold an error, taken as empty: 1 (B2)",
        "sheet S1: cells that hold a date, which may have been typed as something else: 1 (E2)",
    ]


def test_a_date_above_the_list_or_in_a_column_without_meaning_is_no_news():
    rows = [["Released", date(2024, 3, 1)], ["Ref", "Value", "Checked on"], ["C1", "1u", date(2024, 3, 1)]]
    assert notes(read(xlsx(rows))) == []


# --- merged cells ----------------------------------------------------------------------------------------------------


def merged(rows, *ranges):
    def merge(book):
        for one in ranges:
            book["S1"].merge_cells(one)

    return read(xlsx(rows, change=merge))


def test_choices_that_share_merged_references_are_alternates():
    rows = [
        ["Ref", "Value", "MPN", "Voltage"],
        ["C1, C2", "1u", "AB12", "50 V"],
        ["", "", "CD34", "63 V"],
        ["C3", "2u", "EF56", ""],
    ]
    reading = merged(rows, "A2:B3")
    assert [row.refs for row in reading.rows] == [("C1", "C2"), ("C3",)]
    (alternate,) = reading.rows[0].alternates
    assert [(fact.attribute, fact.value, fact.source.cell) for fact in alternate] == [
        ("rating:voltage", "63 V", "S1!D3"),
        ("type", "CD34", "S1!C3"),
    ]


def test_rows_that_hold_nothing_but_merged_cells_are_no_rows():
    reading = merged([["Ref", "Value"], ["C1", "1u"], ["", ""], ["C2", "2u"]], "A2:A3", "B2:B3")
    assert [row.refs for row in reading.rows] == [("C1",), ("C2",)]


def test_a_title_or_caption_merged_over_the_table_stays_one_cell():
    rows = [["Bill of materials"], ["Ref", "Value", "MPN"], ["C1", "1u", "AB12"], ["DNP"], ["C2", "2u", "CD34"]]
    reading = merged(rows, "A1:C1", "A4:C4")
    assert [(row.refs[0], facts.get("fitted")) for row, (_, facts) in zip(reading.rows, told(reading), strict=True)] == [
        ("C1", None),
        ("C2", False),
    ]


def test_a_mark_merged_over_the_columns_of_variants_counts_for_each():
    rows = [["Ref", "Value", "Qty EU", "Qty US"], ["C1", "1u", 1, ""], ["C2", "2u", 1, 0]]
    reading = merged(rows, "C2:D2")
    assert [(v.name, v.fitted, v.not_fitted) for v in reading.variants] == [
        ("EU", ("C1", "C2"), ()),
        ("US", ("C1",), ("C2",)),
    ]


def test_two_rows_of_headings_merged_where_they_are_one():
    rows = [["Reference", "Rated", ""], ["", "Voltage", "Current"], ["F1", "250 V", "2 A"]]
    assert told(merged(rows, "A1:A2", "B1:C1")) == [(("F1",), {"rating:voltage": "250 V", "rating:current": "2 A"})]


def test_a_variant_that_hangs_on_a_formula_without_a_value_is_not_guessed():
    rows = [["Ref", "Value", "Qty EU", "Qty US"], ["C1", "1u", "=1", 1], ["C2", "1u", 1, 0]]
    refused(
        xlsx(rows),
        "bom.xlsx:2: sheet S1: which variant has the part stands in a formula without a stored value; found nothing in C2",
    )


def test_a_list_whose_references_are_formulas_without_values():
    refused(xlsx([["Ref", "Value"], ["=A1", "1u"], ["=A2", "2u"]]), "save it again, so that it stores what its formulas give")


# --- more strangers --------------------------------------------------------------------------------------------------


SPACES = " ".join(f'xmlns:{name}="urn:oasis:names:tc:opendocument:xmlns:{name}:1.0"' for name in ("office", "table", "text"))


def opendocument(table):
    """An OpenDocument spreadsheet with this in place of its sheets."""
    body = f"<office:body><office:spreadsheet>{table}</office:spreadsheet></office:body>"
    content = f"<office:document-content {SPACES}>{body}</office:document-content>"
    return members(ods(ROWS), **{"content.xml": content})


def test_what_is_small_in_the_file_only(monkeypatch):
    monkeypatch.setattr(limits, "SHEET_CELLS", 100_000)
    monkeypatch.setattr(limits, "SHEET_TEXT", 10_000_000)
    cells = '<table:table-cell table:number-columns-repeated="512"><text:p>R1</text:p></table:table-cell>'
    rows = f'<table:table-row table:number-rows-repeated="249000">{cells}</table:table-row>'
    refused(opendocument(f"<table:table>{rows}</table:table>"), "too many cells")
    row = '<row><c t="s"><v>0</v></c></row>'
    refused(shared(["x" * 60_000], row * 200), "the texts of all cells are too long together")
    refused(shared(["x" * 70_000], row), "a cell is too long")


def test_merges_over_each_other_end():
    sheet = Sheet(Room("bom.xlsx", 10_000, 10_000), "S1")
    for row in range(1, 200):
        sheet.put(row, 1, "R1")
        sheet.put(row, 2, "1k")
    sheet.merged = [(1, 1, 10_000, 512)] * 1000
    with pytest.raises(InputError, match="too many cells"):
        sheet.records()


def test_a_sheet_that_is_no_list_may_be_large():
    data = xlsx([[*range(600)], ["x"]], ROWS)
    assert len(read(data).rows) == 2
    wide = [[*ROWS[0], *[""] * 600, "far"], *ROWS[1:]]
    refused(xlsx(ROWS, wide), "bom.xlsx:1: sheet S2: too many columns; found WF1")


def test_a_wrong_password_an_old_form_and_another_document():
    refused(members(ods(ROWS), mimetype="application/vnd.oasis.opendocument.text"), "the zip file is no workbook")
    relations = '<Relationships><Relationship Id="r" Type="x/officeDocument" Target="word/document.xml"/></Relationships>'
    document = members(PLAIN, **{"_rels/.rels": relations, "word/document.xml": "<document><body/></document>"})
    refused(document, "the zip file is no workbook")


def test_members_are_found_by_their_relations():
    with zipfile.ZipFile(io.BytesIO(PLAIN)) as old:
        start, book = old.read("_rels/.rels").decode(), old.read("xl/workbook.xml").decode()
        links = old.read("xl/_rels/workbook.xml.rels").decode()
    moved = {
        "_rels/.rels": start.replace("xl/workbook.xml", "xl/book22.xml"),
        "xl/workbook.xml": None,
        "xl/book22.xml": book,
        "xl/_rels/workbook.xml.rels": None,
        "xl/_rels/book22.xml.rels": links.replace("/xl/worksheets/sheet1.xml", "../xl/./worksheets/sheet1.xml"),
    }
    assert told(read(members(PLAIN, **moved))) == told(read(PLAIN))


def test_packing_and_attributes(monkeypatch):
    out = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(PLAIN)) as old, zipfile.ZipFile(out, "w", zipfile.ZIP_LZMA) as new:
        for name in old.namelist():
            new.writestr(name, old.read(name))
    refused(out.getvalue(), "packed in a way that workbooks are not")
    attributes = " ".join(f'a{at}="1"' for at in range(300))
    refused(members(PLAIN, **{SHEET: sheet_of(f"<row {attributes}/>")}), "too many attributes")
    monkeypatch.setattr(limits, "ZIP_BYTES", 10_000)
    refused(PLAIN, "too large together")
    refused(b"PK\x03\x04" + b"PK\x01\x02" * 3000, "too many files")


def test_document_types_in_opendocument():
    doctype = '<!DOCTYPE a [<!ENTITY a "aaaaaaaaaa"><!ENTITY b "&a;&a;&a;&a;&a;&a;&a;&a;">]>'
    with zipfile.ZipFile(io.BytesIO(ods(ROWS))) as old:
        content = old.read("content.xml").decode()
    refused(members(ods(ROWS), **{"content.xml": content.replace("?>", "?>" + doctype, 1)}), "document type")


def test_sheets_of_linked_files_are_no_lists():
    cells = [[f"<table:table-cell><text:p>{cell}</text:p></table:table-cell>" for cell in row] for row in ROWS]
    lines = "".join(f"<table:table-row>{''.join(row)}</table:table-row>" for row in cells)
    linked = f"<table:dde-links><table:dde-link><table:table>{lines}</table:table></table:dde-link></table:dde-links>"
    refused(opendocument(linked), "the bill of materials is empty")
    rows = f"<table:table-row-group><table:table-rows>{lines}</table:table-rows></table:table-row-group>"
    assert len(read(opendocument(f'<table:table table:name="S">{rows}</table:table>{linked}')).rows) == 2


def test_a_workbook_whose_only_list_is_hidden():
    def hide(book):
        book["S2"].sheet_state = "hidden"

    data = xlsx([["cover"]], ROWS, change=hide)
    assert notes(read(data)) == [
        "sheets without a list of parts, left out: 1 (S1)",
        "sheets that are not shown, read all the same since no other lists parts: 1 (S2)",
    ]


# --- the same as a delimited table -----------------------------------------------------------------------------------


def said(facts):
    """What facts say and where, but for the line: a delimited table has several in one row."""
    return [(fact.attribute, fact.value, fact.text, fact.source.column) for fact in facts]


def everything(reading):
    """All that a reading says, but for its places."""
    rows = [(row.refs, said(row.facts), [said(one) for one in row.alternates], row.unread, row.table) for row in reading.rows]
    return rows, [(one.name, one.fitted, one.not_fitted) for one in reading.variants]


def text_stays_text(book):
    """A text that begins with = is no formula."""
    for row in book["S1"].iter_rows():
        for cell in row:
            if isinstance(cell.value, str):
                cell.data_type = "s"


def as_text(table):
    return xlsx(table, change=text_stays_text)


@pytest.mark.parametrize("write", [as_text, ods])
@pytest.mark.parametrize("name", [path.name for path in sorted(BOMS.iterdir()) if path.suffix != ".yaml"])
def test_every_list_of_the_other_reader_says_the_same_as_a_workbook(name, write):
    blob = read_file(BOMS / name)
    text = decoded(blob)[0]
    tables = [list(csv.reader(io.StringIO(text), delimiter=mark, skipinitialspace=True)) for mark in ",;\t|"]
    table = max(tables, key=lambda rows: sum(map(len, rows)))
    assert everything(read(write(table))) == everything(bom_table.READER.read(blob))


texts = st.text(st.characters(codec="utf-8", exclude_categories=("Cc", "Cs", "Co", "Cn", "Zl", "Zp")), max_size=12).map(str.strip)
figures = st.one_of(st.integers(-(10**12), 10**12), st.decimals(-(10**6), 10**6, places=6).map(float))
table_rows = st.lists(st.tuples(texts, texts, figures), min_size=1, max_size=8)


@settings(max_examples=30, deadline=None)
@given(table_rows)
def test_what_is_written_is_read(rows):
    """The workbook gives what the delimited table gives, figures too."""
    head = ["Reference", "Value", "Comment field", "Stock"]
    text = io.StringIO()
    lines = [[f"R{at}", one, two, number(repr(figure))] for at, (one, two, figure) in enumerate(rows, 1)]
    csv.writer(text, quoting=csv.QUOTE_ALL).writerows([head, *lines])
    wanted = everything(bom_table.READER.read(Blob("bom.csv", text.getvalue().encode())))
    table = [head, *([f"R{at}", *cells] for at, cells in enumerate(rows, 1))]
    assert everything(read(as_text(table))) == wanted
    assert everything(read(ods(table))) == wanted


@settings(max_examples=60, deadline=None)
@given(st.sampled_from([PLAIN, ods(ROWS)]), st.integers(0, 10_000), st.integers(0, 255), st.booleans())
def test_damaged_copies_end_in_a_message_or_read(data, at, byte, cut):
    broken = bytearray(data[: at % len(data)] if cut else data)
    if broken:
        broken[at % len(broken)] = byte
    settles(bytes(broken))


def settles(data):
    try:
        reading = read(data)
    except InputError as error:
        assert str(error).startswith("bom.xlsx")
    else:
        assert reading.rows


INSIDE = {"xl/workbook.xml", "xl/styles.xml", "content.xml", "_rels/.rels", SHEET, STRINGS, LINKS}
RICH = shared(["Reference", "Value", "C1", "100n"], "".join(f'<row r="{at}"><c r="A{at}" t="s"><v>{2 * at - 2}</v></c>'
              f'<c r="B{at}" t="s"><v>{2 * at - 1}</v></c></row>' for at in (1, 2)))  # fmt: skip


@settings(max_examples=150, deadline=None)
@given(st.data(), st.sampled_from([RICH, ods(ROWS)]))
def test_damage_inside_the_zip_ends_in_a_message_or_is_read(data, book):
    """Behind the checksums: characters of the XML changed, taken out, doubled."""
    with zipfile.ZipFile(io.BytesIO(book)) as old:
        name = data.draw(st.sampled_from(sorted(INSIDE & set(old.namelist()))))
        content = old.read(name)
    for _ in range(data.draw(st.integers(1, 3))):
        at, end = sorted(data.draw(st.tuples(*[st.integers(0, len(content))] * 2)))
        piece = data.draw(st.sampled_from([b"", b"<", b"9", b"-1", b"A", content[at : at + 20] * 2, b'"', b"\xff", b"&#0;"]))
        content = content[:at] + piece + content[min(end, at + 3) :]
    settles(members(book, **{name: content}))
