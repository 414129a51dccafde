"""What people call the kinds of parts in a column or a declaration."""

from __future__ import annotations

import re
from functools import lru_cache

from checker import limits
from checker.model.candidate import KINDS


@lru_cache(maxsize=1024)
def normal_kind(text: str) -> str | None:
    """The kind of `KINDS` a declared word means; blanks, dashes, underscores and case do not matter; None when it is none."""
    said = "-".join(re.findall(r"[^\W_]+", text[: limits.NAME].casefold()))
    for word in (said, said.removesuffix("s"), said.removesuffix("es")):
        found = SYNONYMS.get(word, word)
        if found in KINDS:
            return found
    return None


# Only words with one meaning: `transistor` and `dc-dc converter` leave open what matters here.
SYNONYMS = {
    word: kind
    for kind, listed in {
        "transformer": "xfmr trafo flyback-transformer mains-transformer power-transformer pulse-transformer",
        "gate-drive-transformer": "gate-driver-transformer gate-transformer",
        "current-transformer": "current-sense-transformer ct",
        "optocoupler": "opto opto-coupler optoisolator opto-isolator photocoupler photo-coupler opto-triac optotriac phototriac",
        "digital-isolator": "isolator isolated-transceiver",
        "isolated-module": "isolated-dc-dc isolated-dcdc isolated-dc-dc-converter isolated-dc-dc-module isolated-converter "
        "ac-dc-module acdc-module ac-dc-converter ac-dc ac-dc-power-module isolated-dcdc-converter isolated-power-module",
        "relay": "reed-relay electromechanical-relay",
        "solid-state-relay": "ssr photorelay photo-relay photomos",
        "isolated-amplifier": "isolation-amplifier",
        "isolated-driver": "isolated-gate-driver",
        "hall-sensor": "hall hall-effect-sensor hall-current-sensor",
        "resistor": "res",
        "capacitor": "cap y-capacitor x-capacitor electrolytic-capacitor ceramic-capacitor film-capacitor elko safety-capacitor",
        "inductor": "ind choke coil",
        "ferrite": "ferrite-bead bead",
        "common-mode-choke": "cmc emi-choke common-mode-inductor common-mode-filter",
        "filter": "emi-filter line-filter mains-filter",
        "diode": "schottky schottky-diode rectifier rectifier-diode",
        "zener": "zener-diode",
        "tvs": "tvs-diode transient-suppressor suppressor esd-protection",
        "bridge": "bridge-rectifier rectifier-bridge diode-bridge",
        "bipolar": "bjt bipolar-transistor npn pnp",
        "mosfet": "nfet pfet fet nmos pmos nmosfet pmosfet n-mosfet p-mosfet",
        "thyristor": "scr",
        "varistor": "mov vdr",
        "gas-tube": "gdt gas-discharge-tube",
        "thermistor": "ntc ptc-thermistor ntc-thermistor inrush-limiter",
        "fuse": "fuse-holder fuseholder",
        "resettable-fuse": "polyfuse ptc-fuse poly-fuse pptc",
        "switch": "button push-button pushbutton",
        "jumper": "solder-jumper",
        "net-tie": "nettie",
        "crystal": "xtal resonator oscillator quartz",
        "network": "resistor-network resistor-array",
        "battery": "battery-holder cell coin-cell",
        "potentiometer": "pot trimmer trimpot",
        "regulator": "ldo voltage-regulator linear-regulator switching-regulator",
        "controller": "pwm-controller smps-controller",
        "shunt-reference": "shunt-regulator shunt-voltage-reference",
        "ic": "integrated-circuit mcu microcontroller",
        "connector": "conn terminal-block terminal header socket plug jack",
        "inlet": "mains-inlet ac-inlet power-inlet appliance-inlet",
        "test-point": "testpoint test-pad",
        "hole": "mounting-hole",
        "heatsink": "heat-sink",
        "buzzer": "speaker",
        "display": "lcd oled",
    }.items()
    for word in listed.split()
}
