"""Publications of the equations from the bibliography of the source, corrected where it is incomplete."""

from __future__ import annotations

import re
import unicodedata
from pathlib import Path

import CoolProp

#: Journals as the entries abbreviate them.
_JPCRD, _FPE = "J. Phys. Chem. Ref. Data", "Fluid Phase Equilib."

#: Entries of the bibliography that are incomplete or misprinted in the source.
CORRECTIONS = {
    "Gao-JPCRD-2020": {
        "author": "K. Gao and J. Wu and I. H. Bell and A. H. Harvey and E. W. Lemmon",
        "year": "2023",
        "title": "A Reference Equation of State with an Associating Term for the Thermodynamic Properties of Ammonia",
        "volume": "52",
        "pages": "013102",
        "doi": "10.1063/5.0128269",
    },
    "TillnerRoth-JPCRD-1994": {
        "title": "An International Standard Formulation for the Thermodynamic Properties of 1,1,1,2-Tetrafluoroethane "
        "(HFC-134a) for Temperatures from 170 K to 455 K and Pressures up to 70 MPa"
    },
    "IAPWS-Melting-2011": {"institution": "IAPWS R14-08(2011)"},
    "Akasaka-JCED-2019": {
        "title": "Fundamental Equations of State for cis-1,3,3,3-Tetrafluoropropene [R-1234ze(Z)] and "
        "3,3,3-Trifluoropropene (R-1243zf)",
        "year": "2019",
        "volume": "64",
        "pages": "4679-4691",
        "doi": "10.1021/acs.jced.9b00007",
    },
    "Akasaka-IJT-2023": {"pages": "50"},
    "Beckmueller-IJT-2019-octane": {
        "author": "R. Beckmüller and R. Span and E. W. Lemmon and M. Thol",
        "title": "A Fundamental Equation of State for the Calculation of Thermodynamic Properties of n-Octane",
        "journal": _JPCRD,
        "year": "2022",
        "volume": "51",
        "doi": "10.1063/5.0104661",
    },
    "Bell-NeonMelting-2026": {"institution": "Unpublished fit to data evaluated by NIST"},
    "Eisenbach-JPCRD-2021": {"pages": "023105"},
    "Gao-JCED-2016": {"volume": "61", "pages": "2859-2872", "doi": "10.1021/acs.jced.6b00195"},
    "Herrig-JPCRD-2019": {"year": "2018", "volume": "47", "pages": "043102", "doi": "10.1063/1.5053993"},
    "Lemmon-JCED-2016-365227": {"year": "2015", "volume": "60", "pages": "3745-3758"},
    "Lemmon-PROPYLENE-2013": {"institution": "Unpublished"},
    "Marx-BOOK-1992": {
        "title": "Neue Zustandsgleichungen für R 12, R 22, R 11 und R 113: Beschreibung des thermodynamischen "
        "Zustandsverhaltens bei Temperaturen bis 525 K und Drücken bis 200 MPa"
    },
    "McCarty-ACE-1990": {
        "author": "R. D. McCarty and V. D. Arp",
        "title": "A New Wide Range Equation of State for Helium",
        "journal": "Adv. Cryog. Eng.",
        "year": "1990",
        "volume": "35",
        "pages": "1465-1475",
        "doi": "10.1007/978-1-4613-0639-9_174",
    },
    "OrtizVega-JPCRD-2019": {"institution": "Unpublished"},
    "Thol-2012": {"institution": "Unpublished"},
    "Thol-FPE-2016-MM": {
        "author": "Monika Thol and Frithjof H. Dubberke and Gábor Rutkai and Thorsten Windmann and Andreas Köster and "
        "Roland Span and Jadran Vrabec",
        "year": "2016",
        "volume": "418",
        "pages": "133-151",
    },
    "Thol-FPE-2019-alkanes-hexane": {"journal": f"Submitted to {_FPE}"},
    "Thol-FPE-2019-alkanes-pentane": {"journal": f"Submitted to {_FPE}"},
    "Thol-FPE-2019-siloxanes": {
        "journal": "Ind. Eng. Chem. Res.",
        "volume": "58",
        "pages": "9617-9635",
        "doi": "10.1021/acs.iecr.9b00608",
    },
    "Thol-IJT-2016-R1234zeE": {"pages": "28"},
    "Thol-JPCRD-2019-Neon": {"year": "2019", "journal": _JPCRD, "volume": "48", "pages": "023101"},
    "Younglove-NIST-1982": {"journal": _JPCRD, "volume": "11, Suppl. 1"},
    "Zhou-IJT-2016-R245ca": {"author": "Yong Zhou and Eric W. Lemmon", "pages": "27"},
    "deVries-ICR-1995": {"journal": "19th Int. Congr. Refrig., The Hague"},
}


def plain_text(text: str) -> str:
    """BibTeX text without braces and accents written as commands."""
    text = text.replace(r"\ss", "ß").replace("~", " ").replace(r"\&", "&")
    text = re.sub(r"\$\\rho\$|\$rho\$|(?<=, )rho(?=, T)", "ρ", text)
    text = re.sub(r"\$_\{?(\d+)\}?\$", r"\1", text)
    accents = {'"': "\u0308", "'": "\u0301", "`": "\u0300", "^": "\u0302", "c": "\u0327", "v": "\u030c"}

    def compose(match: re.Match[str]) -> str:
        letter = {r"\i": "i", r"\o": "ø"}.get(match[2], match[2])
        return unicodedata.normalize("NFC", letter + accents[match[1]])

    text = re.sub(r"\\([\"'`^]|[cv](?=[{ ]))\s*\{?(\\i|[A-Za-z])\}?", compose, text)
    text = text.replace(r"\o", "ø").replace(r"\l", "ł")
    return re.sub(r"\s+", " ", re.sub(r"[{}]|\\", "", text)).strip()


def bibliography() -> dict[str, dict[str, str]]:
    """Entries of the .bib file in the wheel: key -> fields in lower case."""
    text = (Path(CoolProp.__file__).parent / "CoolPropBibTeXLibrary.bib").read_text(encoding="utf-8", errors="replace")
    entries = {}
    for match in re.finditer(r"@\w+\{([^,\s]+),(.*?)\n\}", text, flags=re.DOTALL):
        fields = re.findall(r"^\s*(\w+)\s*=\s*(\{.*?\}|\".*?\"|\d+),?\s*$", match[2], flags=re.MULTILINE)
        entries[match[1]] = {name.lower(): plain_text(value.strip('"')) for name, value in fields}
    return entries


def first_name_first(author: str) -> str:
    """Name of an author with the surname last, also where the entry writes "Surname, First"; a space after initials."""
    surname, comma, first = author.partition(", ")
    name = f"{first} {surname}" if comma else author
    return re.sub(r"(?<=\b[A-Z]\.)(?=[A-Z])", " ", name)


#: Journals that entries write out, as the others abbreviate them.
ABBREVIATED = {
    "International Journal of Thermophysics": "Int. J. Thermophys.",
    "Int. J. Thermophys": "Int. J. Thermophys.",
    "International Journal of Refrigeration": "Int. J. Refrig.",
    "Industrial & Engineering Chemistry Research": "Ind. Eng. Chem. Res.",
}


def publications(keys: str, library: dict[str, dict[str, str]]) -> list[dict[str, str]]:
    """Authors, year, title, where published and DOI of each comma-joined key."""
    found = []
    for key in filter(None, (part.strip() for part in keys.split(","))):
        entry = library.get(key, {}) | CORRECTIONS.get(key, {})
        where = ABBREVIATED.get(entry.get("journal", ""), entry.get("journal", ""))
        where = where or entry.get("institution") or entry.get("publisher") or entry.get("school") or ""
        if entry.get("volume"):
            where += f" {entry['volume']}"
        if entry.get("pages"):
            where += f", {re.sub(r' *--? *', '-', entry['pages'])}"
        authors = [first_name_first(author) for author in entry["author"].split(" and ")]
        found.append(
            {
                "authors": "; ".join(authors),
                "year": entry.get("year", ""),
                "title": entry.get("title", ""),
                "published_in": where,
                "doi": entry.get("doi", ""),
            }
        )
    return found
