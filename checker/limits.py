"""How much of a stranger's file is accepted. Counts and sizes only, never wall-clock, so that results do not depend
on the machine. Beyond a limit the run ends with status 2; a cut report is never printed as if it were whole."""

from __future__ import annotations

FILE_BYTES = 128 * 2**20  # one netlist, BOM or layout; a verbose netlist of 100,000 parts has 97 MB
YAML_BYTES = 4 * 2**20  # declaration, project file, parts file, ruleset, concessions, policy
REPORT_BYTES = 256 * 2**20  # a saved report
DEPTH = 32  # nested forms or elements; the deepest real netlist has 8
TOKEN = 64 * 2**10  # characters of one atom or string
NAME = 1024  # characters of a reference, pin, net or domain name
ATOMS = 12_000_000  # atoms of one S-expression file, elements and attributes of one XML file
PARTS = 250_000
NETS = 500_000
PINS_PER_NET = 500_000
PINS_PER_PART = 20_000
ARRAY = 65_536  # members of one array of ports or instances
FLATTENED = 4_000_000  # instances, ports and connections of a design once every cell inside a cell is placed
PADS = 500_000  # lands and holes of one layout; the largest real board looked at has 5,763
BOM_ROWS = 250_000
BOM_COLUMNS = 512
CELL = 1024  # characters of a BOM cell that are looked at for values and ratings
ZIP_MEMBERS = 1_000  # files in a workbook; real ones have 8 to 40
ZIP_MEMBER_BYTES = 64 * 2**20  # of one of them, unpacked
ZIP_RATIO = 200  # unpacked to packed, from ZIP_SMALL bytes on
ZIP_SMALL = 2**20
ZIP_BYTES = 256 * 2**20  # of all of them together, unpacked
SHEETS = 256
SHEET_CELLS = 4_000_000  # cells of a workbook that hold text, once repeated ones are written out
SHEET_TEXT = 128 * 2**20  # characters in them
STRINGS = 2_000_000  # shared strings of a workbook
REFERENCES_PER_ROW = 20_000
RANGE = 1_000  # references one range such as C1-C40 may stand for
ALTERNATES = 32  # candidates of one part
YAML_DEPTH = 16
YAML_NODES = 200_000
DOMAINS = 10_000  # named domains of one design
BARRIERS = 20_000  # pairs of circuits that something lies across
VERDICTS = 2_000_000
DESIGNS = 1_000  # designs of one project file
