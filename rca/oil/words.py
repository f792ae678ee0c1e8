"""How oil properties are written for a reader."""

_LABELS = {
    "viscosity_40": "Viscosity at 40 °C",
    "viscosity_100": "Viscosity at 100 °C",
    "acid_number": "Acid number",
    "water": "Water",
    "oxidation": "Oxidation (infrared)",
    "nitration": "Nitration (infrared)",
    "sulfation": "Sulfation (infrared)",
    "soot": "Soot (infrared)",
    "colour": "Colour (ASTM D1500)",
    "patch_colour": "Patch colour",
    "antioxidant_remaining": "Antioxidant left",
    "oxidation_life": "Oxidation life (pressure vessel)",
    "ferrous_index": "Ferrous index",
    "cleanliness_code": "Cleanliness, ≥6 µm scale number",
    "cleanliness_14": "Cleanliness, ≥14 µm scale number",
    "particles_4": "Particles ≥4 µm(c)",
    "particles_6": "Particles ≥6 µm(c)",
    "particles_14": "Particles ≥14 µm(c)",
    "insolubles": "Insolubles",
    "air_release": "Air release at 50 °C",
    "foam_tendency": "Foam tendency",
    "foam_stability": "Foam stability",
    "flash_point": "Flash point",
    "conductivity": "Conductivity",
}
_ELEMENTS = {
    "Fe": "Iron",
    "Cu": "Copper",
    "Cr": "Chromium",
    "Al": "Aluminium",
    "Pb": "Lead",
    "Sn": "Tin",
    "Ni": "Nickel",
    "Si": "Silicon",
    "Na": "Sodium",
    "K": "Potassium",
    "Ca": "Calcium",
    "Mg": "Magnesium",
    "Zn": "Zinc",
    "P": "Phosphorus",
    "B": "Boron",
    "Ba": "Barium",
    "Mo": "Molybdenum",
    "Ag": "Silver",
    "Ti": "Titanium",
    "V": "Vanadium",
    "Mn": "Manganese",
    "Li": "Lithium",
    "S": "Sulfur",
    "Cl": "Chlorine",
}
_UNITS = {
    "mm2/s": "mm²/s",
    "mgKOH/g": "mg KOH/g",
    "degC": "°C",
    "dE": "ΔE",
    "D1500": "",
    "ISO 4406": "",
    "-": "",
}


def property_name(name: str) -> str:
    """The property in words, e.g. "Acid number" or "Iron"."""
    return _LABELS.get(name) or _ELEMENTS.get(name) or name.replace("_", " ")


def unit_text(unit: str) -> str:
    """The unit as it is printed; empty for a scale number."""
    return _UNITS.get(unit, unit)


def property_label(name: str, unit: str) -> str:
    """The property with its unit in brackets, for an axis."""
    written = unit_text(unit)
    return f"{property_name(name)} [{written}]" if written else property_name(name)
