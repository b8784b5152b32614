"""Bad input, part 3: numbers that no cell has.

Every case is a small edit of the starter study and what the refusal must say: old text, new
text, and parts of the message (key path, value, what is allowed, what is usual).
"""

from __future__ import annotations

Case = tuple[str, str, list[str]]

_RESISTANCE = (
    "must be at least 100 ohm cm^2 and at most 1e+06 ohm cm^2; "
    "5000 to 100000 ohm cm^2 is usual (common practice)"
)
_CAPACITANCE = (
    "must be at least 0.1 uF/cm^2 and at most 10 uF/cm^2; "
    "0.7 to 2 uF/cm^2 is usual (common practice)"
)
_AXIAL = (
    "must be at least 10 ohm cm and at most 1000 ohm cm; "
    "70 to 300 ohm cm is usual (common practice)"
)
_DIAMETER = "must be above 0 um and at most 100 um; 0.2 to 10 um is usual (common practice)"
_LENGTH = "must be above 0 um and at most 10000 um; 10 to 2000 um is usual (common practice)"


def _ions(inside: str) -> str:
    chloride = f'chloride = {{ inside = "{inside} mM", outside = "130 mM" }}'
    return f'{chloride}, temperature = "32 degC"'


RANGES: dict[str, Case] = {
    "a resistance without its kilo": (
        '"15 kohm cm^2"', '"15 ohm cm^2"',
        [f"cell.membrane.resistance = '15 ohm cm^2': {_RESISTANCE}"],
    ),
    "a resistance of glass": (
        '"15 kohm cm^2"', '"15 Mohm cm^2"', [f"'15 Mohm cm^2': {_RESISTANCE}"],
    ),
    "no resistance": ('"15 kohm cm^2"', '"0 ohm cm^2"', [f"'0 ohm cm^2': {_RESISTANCE}"]),
    "a membrane thinner than its molecules": (
        '"1 uF/cm^2"', '"50 uF/cm^2"', [f"membrane.capacitance = '50 uF/cm^2': {_CAPACITANCE}"],
    ),
    "negative capacitance": (
        '"1 uF/cm^2"', '"-1 uF/cm^2"', [f"capacitance = '-1 uF/cm^2': {_CAPACITANCE}"],
    ),
    "cytoplasm better than sea water": (
        '"150 ohm cm"', '"1.5 ohm cm"', [f"cell.membrane.axial = '1.5 ohm cm': {_AXIAL}"],
    ),
    "metres for centimetres": ('"150 ohm cm"', '"150 ohm m"', [f"axial = '150 ohm m': {_AXIAL}"]),
    "no length": ('"350 um"', '"0 um"', [f"cell.dendrite.apical.length = '0 um': {_LENGTH}"]),
    "a dendrite of centimetres": ('"350 um"', '"35 cm"', [f"apical.length = '35 cm': {_LENGTH}"]),
    "no diameter": ('"2 um"', '"0 um"', [f"cell.dendrite.apical.diameter = '0 um': {_DIAMETER}"]),
    "a dendrite wider than its cell": ('"2 um"', '"2 mm"', [f"diameter = '2 mm': {_DIAMETER}"]),
    "less than no chloride": (
        'reversal = "-75 mV"', _ions("-7"),
        ["chloride.inside = '-7 mM': must be above 0 mM and at most 1000 mM; 3 to 40 mM is usual"],
    ),
    "an excitatory input that hyperpolarises": (
        'receptor = { reversal = "0 mV"',
        'kind = "excitatory"\nreceptor = { reversal = "-70 mV"',
        ["study.toml: input.weak.receptor = 'reversal -70 mV': an excitatory input must reverse",
         "above rest, -68 mV; or leave kind out, and it is inhibitory"],
    ),
    "an excitatory shunt": (
        'receptor = { reversal = "0 mV"', 'kind = "excitatory"\nreceptor = { shunt = true',
        ["input.weak.receptor = 'reversal -68 mV': an excitatory input must reverse above rest"],
    ),
    "an excitatory input that reverses low by its ions": (
        'receptor = { reversal = "-75 mV"', f'kind = "excitatory"\nreceptor = {{ {_ions("7")}',
        # 26.296 mV x ln(7/130)
        ["input.brake.receptor = 'reversal -76.83 mV': an excitatory input must reverse above"],
    ),
}  # fmt: skip
