"""A report made by hand, as a supply of fourteen parts would give it, for the tests of the writers."""

from __future__ import annotations

from checker.model.report import (
    AssumptionMade,
    BarrierShown,
    BridgingPart,
    Consequence,
    DomainShown,
    Evidence,
    Figure,
    InputFile,
    LimitShown,
    MissingFact,
    PartShown,
    Report,
    RulesetUsed,
    StepShown,
    StressShown,
    Tool,
    VerdictShown,
    WorkingVoltage,
)


def at(path: str, line: int, text: str = "", cell: str | None = None) -> Evidence:
    return Evidence(path=path, line=line, column=0, cell=cell, text=text)


def verdict(rule: str, outcome: str, parts: list[str], **more) -> VerdictShown:
    values = {
        "clause": f"iec-62368-1/{rule}",
        "citation": "",
        "level": "error",
        "hazard": "shock",
        "nets": [],
        "condition": "",
        "what": "",
        "found": None,
        "limit": None,
        "margin": None,
        "missing": None,
        "because": "",
        "step": None,
        "remedy": None,
        "evidence": [],
        "fingerprint": f"{abs(hash_of(rule, outcome, *parts)):016x}",
        "facts_hash": "00",
        "verified": "true",
    }
    return VerdictShown(rule=rule, outcome=outcome, parts=parts, **(values | more))


def hash_of(*words: str) -> int:
    """A number that is the same in every run."""
    return int.from_bytes("|".join(words).encode()[:8].ljust(8, b"."), "big")


VERDICTS = [
    verdict(
        "bridging-capacitor",
        "fail",
        ["C7"],
        clause="iec-62368-1/bridging-capacitor",
        citation="IEC 62368-1:2018 G.11 (5.5.2.1)",
        nets=["PGND", "SGND"],
        what="A capacitor of class X2 bridges reinforced insulation.",
        found=Figure(text="X2"),
        limit=LimitShown(text="Y1, or Y2+Y2 in series"),
        because="Between mains and the unearthed output VOUT insulation must be reinforced, and X2 is no class that insulates.",
        step="s3",
        remedy="Use a Y1 capacitor of 1 nF for C7; with it this clause and the touch current pass.",
        evidence=[at("bom.csv", 14, "CAP X2 1nF", "D14"), at("board.net", 212, "C7")],
        verified="partial",
    ),
    verdict(
        "capacitor-voltage",
        "fail",
        ["C7"],
        clause="derating-commercial/capacitor-voltage",
        citation="supply-guide; profile",
        level="warning",
        hazard="overstress",
        what="The steady voltage uses more of the rating than the house allows.",
        found=Figure(value=355.0, unit="V", form="peak"),
        limit=LimitShown(value=340.0, unit="V", form="peak", bound="at-most", status="partial"),
        margin=-0.044117647,
        because="The rail stands at 355 V and C7 is rated 425 V.",
        step="s4",
        evidence=[at("bom.csv", 14, "425V", "E14")],
        verified="partial",
    ),
    verdict(
        "barrier-insulation",
        "fail",
        ["R99"],
        clause="iec-62368-1/barrier",
        citation="IEC 62368-1 5.4.1; IEC 62368-1:2018 G.12",
        nets=["PGND", "SGND"],
        what="A resistor joins the two sides of the barrier, so that nothing insulates them.",
        because="Taken out, T1 and U1 come apart into two circuits; no other part does that.",
        step="s2",
        condition="as drawn, all parts fitted",
        evidence=[at("board.net", 340, "R99")],
        verified="partial",
    ),
    verdict(
        "barrier-insulation",
        "open",
        ["U3"],
        clause="iec-62368-1/barrier",
        nets=["PGND", "SDA"],
        what="A part that nobody listed has 5 nets on pins 1 to 4 and 6 on 5 to 8, and nothing else joins them.",
        missing=MissingFact(
            part="U3",
            fact="whether U3 insulates, and its isolation rating",
            supply_as="kind and ratings in a parts file, or BOM column Isolation voltage",
            then=[
                Consequence(answer="an isolator rated for 250 V r.m.s., reinforced", outcome="pass"),
                Consequence(answer="no isolator", outcome="fail"),
            ],
        ),
        because="The halves of its package stay apart.",
    ),
    verdict(
        "fuse",
        "open",
        ["F1"],
        clause="iec-62368-1/fuse",
        hazard="fire",
        level="warning",
        what="The rated voltage of the fuse in the line is not given.",
        missing=MissingFact(
            part="F1",
            fact="rated voltage",
            supply_as="BOM column Voltage",
            then=[Consequence(answer="250 V or more", outcome="pass"), Consequence(answer="less than 240 V", outcome="fail")],
        ),
        because="The value text says 2A.",
    ),
    verdict("barrier-insulation", "pass", ["T1"], clause="iec-62368-1/barrier", what="Insulates.", because="Marked reinforced."),
    verdict(
        "barrier-insulation", "pass", ["U1"], clause="iec-62368-1/barrier", what="Insulates.", because="Marked.", verified="partial"
    ),
    verdict("hazardous-source", "pass", ["J1"], clause="iec-62368-1/source", what="Mains enters at J1.", because="Declared."),
    verdict("protective-earth", "not-applicable", [], clause="iec-62368-1/earth", what="There is no earth.", because="Class II."),
]

STEPS = [
    StepShown(id=id, text=said, formula=formula, inputs=inputs, result=result, unit=unit, form=form, citation=citation)
    for id, said, formula, inputs, result, unit, form, citation in (
        ("s1", "PGND belongs to mains: F1 and the bridge D1 lead to the inlet.", "", [], None, "", "", ""),
        ("s2", "The path from T1.3 to T1.7 is PGND, R99, SGND.", "", ["s1"], None, "", "", ""),
        (
            "s3",
            "Mains against an unearthed secondary asks for reinforced.",
            "",
            ["s1", "s3"],
            "reinforced",
            "",
            "",
            "table needed-grade",
        ),
        ("s4", "Allowed voltage.", "ratio * rated", ["s1"], 340.0, "V", "peak", "derating-commercial"),
    )
]

REPORT = Report(
    design="flyback-5w",
    variant=None,
    tool=Tool(version="0.1.0"),
    plugins=["withstand-example 1.0"],
    inputs=[InputFile(role="netlist", path="board.net", sha256="ab" * 32), InputFile(role="bom", path="bom.csv", sha256="cd" * 32)],
    rulesets=[
        RulesetUsed(id="iec-62368-1", edition="2018", revision="1", sha256="12" * 32, unverified=5),
        RulesetUsed(id="derating-commercial", edition="", revision="1", sha256="34" * 32, unverified=0),
    ],
    assumptions=[
        AssumptionMade(key="supply.tolerance", value="10 %", because="No tolerance is declared."),
        AssumptionMade(key="environment.pollution_degree", value="2", because="No pollution degree is declared."),
    ],
    parts=[
        PartShown(
            ref="C7",
            kind="capacitor",
            value=1e-9,
            unit="F",
            ratings={"voltage": Figure(value=250.0, unit="V", form="rms")},
            marks=["X2"],
            maker=None,
            type=None,
            fitted=True,
            critical=True,
            domains=["mains", "VOUT"],
            evidence=[at("bom.csv", 14)],
        )
    ],
    domains=[DomainShown(name="mains", side="primary", earthed=False, nets=["PGND"], parts=["R99"], step="s1")],
    barriers=[
        BarrierShown(
            id="mains|VOUT",
            between=["mains", "VOUT"],
            grade="reinforced",
            bridged_by=["C7", "T1"],
            chains=[["C7"]],
            working_voltage=WorkingVoltage(rms=370.0, peak=510.0, step="s4"),
            required=[
                {
                    "ruleset": "iec-62368-1", "grade": "reinforced", "clearance": 3.0, "electric_strength": {"dc": 4000.0},
                    "step": "s4", "verified": "partial",
                }
            ],
            parts=[
                BridgingPart(
                    part="U1",
                    pins=["1", "3"],
                    sides=[["1"], ["3"]],
                    rms=240.0,
                    provided={"clearance": 2.5, "isolation_test": 5000.0},
                    required=[
                        {
                            "ruleset": "iec-62368-1", "clearance": 3.0, "creepage": 4.8, "through_insulation": 0.0, "step": "s4",
                            "bounded": False, "at_least": {"creepage": 4.8, "through_insulation": 0.0, "clearance": 2.0},
                            "unbounded": ["creepage", "through_insulation"],
                            "missing": ["the working voltage between DRAIN and SGND"],
                        },
                        {"ruleset": "house", "electric_strength": {"rms": 6000.0}, "at_least": {"electric_strength.rms": 5500.0}},
                    ],
                )
            ],
            step="s3",
        )
    ],
    separations=[
        BarrierShown(
            id="live|neutral", between=["live", "neutral"], grade="basic", bridged_by=[], chains=[],
            working_voltage=WorkingVoltage(rms=240.0, peak=339.4, step=None),
            required=[{"ruleset": "iec-62368-1", "creepage": 2.5}], parts=[], reason="line to line before the fuse",
        ),
        BarrierShown(
            id="mains|earth", between=["mains", "earth"], grade="basic", bridged_by=[], chains=[], working_voltage=None,
            required=[], parts=[], reason="nothing lies between them",
        ),
    ],
    stress=[
        StressShown(
            part="Q1", net=None, quantity="voltage", surely=461.0, never_above=None, unit="V", form="peak", kind="repetitive",
            condition="", step="s4",
        )
    ],
    verdicts=VERDICTS,
    steps=STEPS,
    summary={"pass": 3, "fail": 3, "open": 2, "not-applicable": 1, "conceded": 0, "unconfirmed": 1},
    environment={"pollution_degree": "2", "material_group": "IIIb", "altitude": 2000.0},
    notes=["board.net: two nets called SGND were joined"],
)  # fmt: skip
