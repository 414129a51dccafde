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
from checker.files import Blob
from checker.files import read as read_file
from checker.readers import bom_table, workbook
from checker.readers.workbook_sheet import number, place

openpyxl = pytest.importorskip("openpyxl")
odf_document = pytest.importorskip("odf.opendocument")
from odf import table as odf_table  # noqa: E402
from odf import text as odf_text  # noqa: E402

ROOT = Path(__file__).resolve().parents[1]
SAMPLES = ROOT.parent / "shared" / "samples"
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
        cell.addElement(odf_text.P(text=line))
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
    assert (reading.role, reading.form, notes(reading)) == ("bom", "workbook", [])
    assert told(reading) == [(("C1",), {"value": "100n", "rating:voltage": "50 V"}), (("R1", "R2"), {"value": "4k7"})]
    assert [str(row.source) for row in reading.rows] == ["bom.xlsx:2", "bom.xlsx:3"]
    assert plugins.reader_for(Blob("x", write(ROWS)), "bom").form == "workbook"


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
def test_workbooks_of_real_boards():
    for path in sorted(SAMPLES.rglob("*.xlsx")):
        assert len(read(read_file(path).data).rows) > 10


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
    assert [str(row.source) for row in reading.rows] == ["bom.xlsx[S1]:2", "bom.xlsx[S1]:3", "bom.xlsx[S2]:2"]


def test_a_sheet_that_lists_the_same_parts_again_is_left_out():
    reading = read(xlsx(ROWS, [ROWS[0], ["C1", "220n", ""], ["R1", "1k", ""]]))
    assert told(reading)[0][1]["value"] == "100n"
    assert notes(reading) == ["sheet S2 lists parts of sheet S1 again and is left out"]


def test_hidden_sheets_and_hidden_rows():
    def hide(book):
        book["S2"].sheet_state = "hidden"
        book["S1"].row_dimensions[3].hidden = True

    reading = read(xlsx(ROWS, [ROWS[0], ["U1", "817", ""]], change=hide))
    assert [row.refs for row in reading.rows] == [("C1",), ("R1", "R2")]
    assert notes(reading) == [
        "sheets that are not shown, left out: 1 (S2)",
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
        "sheet S1: cells that hold a date, which may have been a type number: 1 (D2)",
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
    shared = (
        '<sst xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main"><si><t>Reference</t></si><si><t>Value</t></si>'
        "<si><r><t>C</t></r><r><t>1</t></r><rPh sb='0' eb='1'><t>no</t></rPh></si><si><t>100n</t></si></sst>"
    )
    data = members(xlsx([["Reference", "Value"], ["C1", "100n"]]), **{"xl/sharedStrings.xml": shared})
    assert told(read(data)) == [(("C1",), {"value": "100n"})]


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
    [("100", "100"), ("4.7000000000000004E-7", "0.00000047"), ("4700.0", "4700"), ("0", "0"), ("-0.5", "-0.5"), ("1E+40", "1E+40")],
)
def test_figures_are_written_without_noise(stored, shown):
    assert number(stored) == shown
    assert number("0.05", percent=True) == "5%"


def test_places():
    assert [place(7, column) for column in (1, 26, 27, 702, 703)] == ["A7", "Z7", "AA7", "ZZ7", "AAA7"]


# --- strangers -------------------------------------------------------------------------------------------------------

PLAIN = xlsx(ROWS)
SHEET = "xl/worksheets/sheet1.xml"
MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"


def sheet_of(cells):
    return f'<worksheet xmlns="{MAIN}"><sheetData>{cells}</sheetData></worksheet>'


def refused(data, message, name="bom.xlsx"):
    with pytest.raises(InputError) as caught:
        read(data, name)
    assert message in str(caught.value)


def test_a_zip_of_something_else_and_no_zip():
    refused(members(PLAIN, **{"xl/workbook.xml": None}), "the zip file is no workbook")
    refused(b"Reference,Value\nR1,1k\n", "this is no workbook; found a delimited table")
    refused(PLAIN[:-200], "the workbook is damaged")
    with pytest.raises(InputError, match="of the old binary form"):
        plugins.reader_for(Blob("bom.xlsx", b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + bytes(200)), "bom")


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
    refused(members(PLAIN, **{"xl/_rels/workbook.xml.rels": relations}), "the bill of materials is empty")


def test_a_cell_that_names_no_text():
    cells = '<row r="1"><c r="A1" t="s"><v>99</v></c></row>'
    refused(members(PLAIN, **{SHEET: sheet_of(cells)}), "a text the workbook does not hold")
    refused(members(PLAIN, **{SHEET: "<worksheet"}), "is no XML")


texts = st.text(st.characters(codec="utf-8", exclude_categories=("Cc", "Cs", "Co", "Cn", "Zl", "Zp")), max_size=12).map(str.strip)
table_rows = st.lists(st.tuples(texts, texts), min_size=1, max_size=8)


@settings(max_examples=40, deadline=None)
@given(table_rows)
def test_what_is_written_is_read(rows):
    """The workbook gives what the delimited table gives."""
    table = [["Reference", "Value", "Comment field"], *([f"R{at}", *cells] for at, cells in enumerate(rows, 1))]
    text = io.StringIO()
    csv.writer(text, quoting=csv.QUOTE_ALL).writerows(table)
    wanted = told(bom_table.READER.read(Blob("bom.csv", text.getvalue().encode())))
    assert told(read(as_text(table))) == wanted
    assert told(read(ods(table))) == wanted


def as_text(table):
    def plain(book):
        for row in book["S1"].iter_rows():
            for cell in row:
                if cell.value is not None:
                    cell.data_type = "s"

    return xlsx(table, change=plain)


@settings(max_examples=60, deadline=None)
@given(st.sampled_from([PLAIN, ods(ROWS)]), st.integers(0, 10_000), st.integers(0, 255), st.booleans())
def test_damaged_copies_end_in_a_message_or_read(data, at, byte, cut):
    broken = bytearray(data[: at % len(data)] if cut else data)
    if broken:
        broken[at % len(broken)] = byte
    try:
        reading = workbook.READER.read(Blob("bom.xlsx", bytes(broken)))
    except InputError as error:
        assert str(error).startswith("bom.xlsx")
    else:
        assert reading.rows
