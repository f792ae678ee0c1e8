"""Names of oil properties as laboratories write them, and their units."""

import re
from typing import Final

ELEMENTS: Final = [
    "Fe",
    "Cu",
    "Cr",
    "Al",
    "Pb",
    "Sn",
    "Ni",
    "Si",
    "Na",
    "K",
    "Ca",
    "Mg",
    "Zn",
    "P",
    "B",
    "Ba",
    "Mo",
    "Ag",
    "Ti",
    "V",
    "Mn",
    "Li",
    "S",
    "Cl",
]
_ELEMENT_WORDS: Final[dict[str, str]] = {
    "iron": "Fe",
    "eisen": "Fe",
    "fer": "Fe",
    "copper": "Cu",
    "kupfer": "Cu",
    "cuivre": "Cu",
    "chromium": "Cr",
    "chrom": "Cr",
    "aluminium": "Al",
    "aluminum": "Al",
    "lead": "Pb",
    "blei": "Pb",
    "plomb": "Pb",
    "tin": "Sn",
    "zinn": "Sn",
    "nickel": "Ni",
    "silicon": "Si",
    "silizium": "Si",
    "silicium": "Si",
    "sodium": "Na",
    "natrium": "Na",
    "potassium": "K",
    "kalium": "K",
    "calcium": "Ca",
    "kalzium": "Ca",
    "magnesium": "Mg",
    "zinc": "Zn",
    "zink": "Zn",
    "phosphorus": "P",
    "phosphor": "P",
    "boron": "B",
    "bor": "B",
    "barium": "Ba",
    "molybdenum": "Mo",
    "silver": "Ag",
    "silber": "Ag",
    "titanium": "Ti",
    "lithium": "Li",
    "sulfur": "S",
    "schwefel": "S",
    "chlorine": "Cl",
    "chlor": "Cl",
}
# property -> (canonical unit, patterns on the header in lower case without unit)
PROPERTIES: Final[dict[str, tuple[str, str]]] = {
    "viscosity_40": (
        "mm2/s",
        r"(kin\w*\.?\s*)?(visc\w*|visk\w*|kv|v|cst)\W*(@|at|bei|à)?\W*40\b.*",
    ),
    "viscosity_100": (
        "mm2/s",
        r"(kin\w*\.?\s*)?(visc\w*|visk\w*|kv|v|cst)\W*(@|at|bei|à)?\W*100\b.*",
    ),
    "acid_number": (
        "mgKOH/g",
        r"acid\w*.*|an|tan|nz|neutrali\w*.*|säurezahl|saeurezahl|indice d.acide",
    ),
    "water": ("mg/kg", r"water.*|wasser.*|eau.*|h2o.*|kf|karl.?fischer.*"),
    "oxidation": ("A/cm", r"oxidation(?!.*life).*|ox|oxydation.*"),
    "nitration": ("A/cm", r"nitr\w*.*"),
    "sulfation": ("A/cm", r"sulfat\w*.*|sulphat\w*.*"),
    "soot": ("A/cm", r"soot.*|ruß.*|russ.*|suie.*"),
    "colour": ("D1500", r"colou?r.*|farbe.*|farbzahl.*|couleur.*"),
    "patch_colour": ("dE", r"patch.*|membrane patch.*|varnish.*"),
    "antioxidant_remaining": ("%", r"antioxid.*|remaining useful.*|restantiox.*"),
    "oxidation_life": ("min", r"oxidation life.*|rotating pressure vessel.*|rpvot.*"),
    "ferrous_index": ("-", r"ferrous.*|pq.*|magnetic.*index.*"),
    "cleanliness_code": ("ISO 4406", r"(iso\s*)?(4406|code|cleanliness.*|reinheit.*)|iso"),
    "particles_4": ("1/mL", r"(particles?|partikel|counts?)?\W*(>|>=|≥)?\s*4\s*(µm|um|μm).*"),
    "particles_6": ("1/mL", r"(particles?|partikel|counts?)?\W*(>|>=|≥)?\s*6\s*(µm|um|μm).*"),
    "particles_14": ("1/mL", r"(particles?|partikel|counts?)?\W*(>|>=|≥)?\s*14\s*(µm|um|μm).*"),
    "insolubles": ("%", r"insolub.*|unlösl.*"),
    "air_release": ("min", r"air.?release.*|luftabscheid.*|désaération.*|lav"),
    "foam_tendency": ("mL", r"foam.*tend.*|schaum.*neig.*"),
    "foam_stability": ("mL", r"foam.*stab.*|schaum.*best.*"),
    "flash_point": ("degC", r"flash.*|flammpunkt.*|point d.éclair.*"),
    "conductivity": ("pS/m", r"conductiv.*|leitf.*|conductivit.*"),
}
META: Final[dict[str, str]] = {
    "id": r"(sample|lab|bottle|probe\w*|labor\w*)?\W*(id|no|nr|number|nummer)\W*.*|sample|probe",
    "sampled": r"(date\W*)?(sampled|taken|drawn)(\W*(on|date|at))?|sampl\w* date|entnahme\w*.*|"
    r"probenahme.*|date de prélèvement",
    "reported": r"report\w*.*|bericht.*",
    "received": r"receiv\w*.*|eingang.*",
    "point": r"(sample|sampling)?\W*(point|location)|entnahmestelle|messstelle|stelle",
    "machine_hours": r"(machine|unit|equipment|masch\w*|betriebs)\W*(hours?|hrs?|stunden|h)\b.*",
    "oil_hours": r"(oil|fluid|öl|oel)\W*(hours?|hrs?|stunden|h|age)\b.*",
    "laboratory": r"lab|laboratory|labor",
    "kind": r"(sample )?(type|kind|status)|art",
    "comment": r"comments?|remarks?|bemerkung\w*|diagnos\w*",
}
# factor to the canonical unit; ppm is read as mg/kg for elements and water
UNIT_FACTORS: Final[dict[tuple[str, str], float]] = {
    ("mg/kg", "mg/kg"): 1.0,
    ("mg/kg", "ppm"): 1.0,
    ("mg/kg", "%"): 1e4,
    ("mm2/s", "mm2/s"): 1.0,
    ("mm2/s", "cst"): 1.0,
    ("mm2/s", "mm²/s"): 1.0,
    ("mgKOH/g", "mgkoh/g"): 1.0,
    ("mgKOH/g", "mg koh/g"): 1.0,
    ("A/cm", "a/cm"): 1.0,
    ("A/cm", "a/0.1mm"): 100.0,
    ("A/cm", "a/0.1 mm"): 100.0,
    ("%", "%"): 1.0,
    ("min", "min"): 1.0,
    ("dE", "de"): 1.0,
    ("1/mL", "1/ml"): 1.0,
    ("1/mL", "1/100ml"): 0.01,
    ("1/mL", "/100ml"): 0.01,
    ("1/mL", "/ml"): 1.0,
    ("mL", "ml"): 1.0,
    ("degC", "degc"): 1.0,
    ("degC", "°c"): 1.0,
    ("pS/m", "ps/m"): 1.0,
    ("D1500", "d1500"): 1.0,
    ("D1500", "astm d1500"): 1.0,
    ("-", "-"): 1.0,
    ("-", ""): 1.0,
    ("D1500", ""): 1.0,
    ("ISO 4406", ""): 1.0,
    ("ISO 4406", "iso 4406"): 1.0,
}
_UNIT = re.compile(r"[\[(]\s*([^\])]*?)\s*[\])]\s*$")


def split_unit(header: str) -> tuple[str, str]:
    """A header without its bracketed unit, and the unit."""
    match = _UNIT.search(header.strip())
    if match is None:
        return header.strip(), ""
    return header.strip()[: match.start()].strip(), match[1]


def recognise(header: str) -> str | None:
    """The canonical name of a property or element a header stands for, or None."""
    name, _ = split_unit(header)
    plain = re.sub(r"\s+", " ", name).strip()
    if plain in ELEMENTS:
        return plain
    folded = plain.casefold()
    if folded in _ELEMENT_WORDS:
        return _ELEMENT_WORDS[folded]
    head = folded.split(" ")[0].strip("()")
    if head in _ELEMENT_WORDS:
        return _ELEMENT_WORDS[head]
    if folded in PROPERTIES:
        return folded
    for canonical, (_, pattern) in PROPERTIES.items():
        if re.fullmatch(pattern, folded):
            return canonical
    return None


def recognise_meta(header: str) -> str | None:
    """Which descriptive column a header stands for, or None."""
    name, _ = split_unit(header)
    folded = re.sub(r"[\s_]+", " ", name).strip().casefold()
    for meta, pattern in META.items():
        if folded == meta.replace("_", " ") or re.fullmatch(pattern, folded):
            return meta
    return None


def canonical_unit(name: str) -> str:
    """The unit a property is kept in."""
    return PROPERTIES[name][0] if name in PROPERTIES else "mg/kg"


def unit_factor(name: str, unit: str) -> float | None:
    """Factor from a written unit to the canonical one; None where the unit does not fit."""
    canonical = canonical_unit(name)
    key = unit.strip().casefold()
    if key == "":
        return 1.0
    return UNIT_FACTORS.get((canonical, key))
