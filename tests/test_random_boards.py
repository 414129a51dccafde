"""Boards nobody would build, of every kind of part the rules ask about: each is judged, and no rule stops."""

from __future__ import annotations

from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from checker import pipeline, rulesets
from checker.model.declaration import Declaration
from tests.test_carriers import KINDS, bill, reading, symbol
from tests.trial_circuits import Part, Trial

NETS = "L N PE GND +12V VBULK PGND DRAIN SEC VOUT VAUX SGND L_FUSED n1 n2 n3 n4".split()
MORE = (
    ("T", symbol("Transformer_1P_2S", "Flyback transformer", "1, 2, 3, 4, 5, 6"), ("EE16", "1-2:128, 3-4:16, 5-6:8"), ("EE16",)),
    ("Q", symbol("Q_NMOS_GDS", "N-MOSFET", "1 G, 2 D, 3 S"), ("4N60", "2N60 600V"), ("TO-220",)),
    ("K", symbol("Relay_SPST", "Relay", "1 A1, 2 A2, 3 11, 4 14"), ("G5 5V",), ("RELAY",)),
    ("RV", symbol("Varistor", "Varistor", "1, 2"), ("10D471K", "14D431"), ("DISC",)),
    ("GDT", symbol("Gas_Discharge_Tube", "Gas tube", "1, 2"), ("2R600",), ("GDT",)),
    ("D", symbol("D_Zener", "Zener", "1 K, 2 A"), ("BZX84C12", "P6KE200A"), ("SOT",)),
    ("L", symbol("CMC", "Common mode choke", "1, 2, 3, 4"), ("2x10mH",), ("",)),
    ("U", symbol("TL431", "shunt reference", "1 REF, 2 A, 3 K"), ("TL431",), ("",)),
    ("U", symbol("PWM_Controller", "Flyback controller", "1 GND, 2 FB, 3 VCC, 4 DRV"), ("controller",), ("SOT-23-6",)),
    ("C", symbol("CP", "Polarised capacitor", "1 +, 2 -"), ("22u/400V", "470u 16V"), ("",)),
    ("PS", symbol("Converter_ACDC", "AC/DC module", "1 AC/L, 2 AC/N, 3 -Vo, 4 +Vo"), ("5W 5V",), ("",)),
)


@st.composite
def boards(draw: st.DrawFn) -> Trial:
    """Three to twenty-four parts, their pins on a few nets or on none; now and then a part that is left out."""
    wiring = draw(st.lists(st.sampled_from(NETS), min_size=3, max_size=12, unique=True))
    parts = []
    for at in range(draw(st.integers(3, 24))):
        prefix, shape, texts, footprints = draw(st.sampled_from((*KINDS, *MORE)))
        nets = {number: draw(st.sampled_from([*wiring, ""])) for number, _ in shape.pins}
        keys = {"unfitted": ""} if draw(st.integers(0, 12)) == 0 else {}
        value, footprint = draw(st.sampled_from(texts)), draw(st.sampled_from(footprints))
        parts.append(Part(f"{prefix}{at + 1}", value, shape, footprint, {pin: net for pin, net in nets.items() if net}, keys))
    return Trial("drawn", {"form": "E", "title": "Drawn", "flag": "property"}, tuple(parts))


@settings(max_examples=150, deadline=None, derandomize=True, suppress_health_check=list(HealthCheck))
@given(boards().filter(lambda trial: any(len(nodes) > 1 for nodes in trial.nets().values())))
def test_no_rule_stops(trial: Trial) -> None:
    chosen = rulesets.load_all(rulesets.DEFAULT)
    judged = pipeline.judge("drawn", [reading("sexpr", trial), bill(trial)], Declaration(), chosen, ())
    assert judged.raised == ()
    assert judged.report.verdicts
