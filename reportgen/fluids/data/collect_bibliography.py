"""Publications of the equations from the bibliography of the source, corrected where it is incomplete."""

from __future__ import annotations

import re
import unicodedata
from pathlib import Path

import CoolProp

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
}


def plain_text(text: str) -> str:
    """BibTeX text without braces and accents written as commands."""
    text = text.replace(r"\ss", "ß").replace("~", " ").replace(r"\&", "&")
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


def publications(keys: str, library: dict[str, dict[str, str]]) -> list[dict[str, str]]:
    """Authors, year, title, where published and DOI of each comma-joined key."""
    found = []
    for key in filter(None, (part.strip() for part in keys.split(","))):
        entry = library[key] | CORRECTIONS.get(key, {})
        where = entry.get("journal") or entry.get("institution") or entry.get("publisher") or entry.get("school") or ""
        if entry.get("volume"):
            where += f" {entry['volume']}"
        if entry.get("pages"):
            where += f", {entry['pages'].replace('--', '-')}"
        authors = entry.get("author", "")
        found.append(
            {
                "authors": authors.replace(" and ", "; "),
                "year": entry.get("year", ""),
                "title": entry.get("title", ""),
                "published_in": where,
                "doi": entry.get("doi", ""),
            }
        )
    return found
