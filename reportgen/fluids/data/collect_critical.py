"""Collects critical temperature, critical pressure and acentric factor of the ideal-gas species into
``critical_constants.json``.

Run by a maintainer, never by a user:

    python reportgen/fluids/data/collect_critical.py

The three constants of a substance are taken from one publication, since the acentric factor belongs to a critical
point: it is where the vapour pressure at seven tenths of *that* critical temperature lies. In this order:

1. the published equation of state, from the data file of the real fluid (unless the equation's own critical point is
   off the stated one by more than a thousandth: then the publication's acentric factor does not belong to it);
2. compilations that state all three: Horstmann et al. 2005, Passut and Danner 1973, Yaws 2014. The species for which
   only the last, which does not say where its values come from, has an acentric factor keep the critical point of a
   critical review where there is one; each value then names its own source.

The compilations are read from the package ``chemicals`` (MIT), which carries them as tables. Rackett's
compressibility Z_RA, from which a volume translation follows, is Hankinson and Thomson's where they list one. Values
far from the same quantity in another compilation are printed, to be looked at.
"""

from __future__ import annotations

import json
from importlib.metadata import version
from pathlib import Path
from typing import Any

from chemicals import MW, CAS_from_any, critical, volume

from reportgen.fluids.gases.species import GasSpecies, library

FOLDER = Path(__file__).parent
TARGET = FOLDER / "critical_constants.json"

#: Key of a source in the file, the table in the package, the publication.
SOURCES = {
    "horstmann-2005": (
        "PSRK",
        "Horstmann, Jabłoniec, Krafczyk, Fischer, Gmehling (2005): PSRK group contribution equation of state: "
        "comprehensive revision and extension IV, Fluid Phase Equilib. 227, 157-164, doi:10.1016/j.fluid.2004.11.002",
    ),
    "passut-1973": (
        "PD",
        "Passut, Danner (1973): Acentric factor: a valuable correlating parameter for the properties of hydrocarbons, "
        "Ind. Eng. Chem. Process Des. Dev. 12, 365-368, doi:10.1021/i260047a026",
    ),
    "yaws-2014": (
        "YAWS",
        "Yaws (2014): Thermophysical properties of chemicals and hydrocarbons, 2nd edition, Gulf (a compilation "
        "without the origin of each value)",
    ),
    "mathews-1972": (
        "MATTHEWS",
        "Mathews (1972): Critical constants of inorganic substances, Chem. Rev. 72, 71-100, doi:10.1021/cr60275a004",
    ),
}
RACKETT_SOURCE = (
    "Hankinson, Thomson (1979): A new correlation for saturated densities of liquids and their mixtures, "
    "AIChE J. 25, 653-663, doi:10.1002/aic.690250412"
)
#: Compilations that state all three constants, best first, but for the last resort.
_COMPLETE = ("horstmann-2005", "passut-1973")
#: Relative distance between a stated critical temperature and the one of the equation that is let pass.
_TRUE_CRITICAL = 1e-3
#: Relative differences between compilations above which a maintainer is told.
_TOLD = {"temperature": 0.005, "pressure": 0.03}
#: Atoms and radicals have no liquid, and no critical point that anyone has published.
_WITHOUT = {"H", "N", "O", "OH", "S2"}


def _real_fluids() -> dict[str, tuple[str, dict[str, Any]]]:
    """Data files of real fluids by CAS number, with their file names."""
    found = {}
    for path in sorted(FOLDER.glob("*.json")):
        data = json.loads(path.read_text(encoding="utf-8"))
        if data.get("format") == "reportgen-fluid/1" and data.get("cas"):
            found[data["cas"]] = (path.name, data)
    return found


def _publication(data: dict[str, Any]) -> str:
    """The publication of a real fluid's equation, as one line."""
    first = data["sources"]["equation"][0]
    doi = f", doi:{first['doi']}" if first["doi"] else ""
    return f"{first['authors']} ({first['year']}): {first['title']}, {first['published_in']}{doi}"


def _cas(species: GasSpecies) -> str:
    """CAS number by name or other name, checked by the molar mass."""
    for name in (species.name, *species.aliases):
        try:
            number = str(CAS_from_any(name))
        except ValueError:
            continue
        if abs(MW(number) - species.molar_mass * 1e3) < 0.05:
            return number
    raise ValueError(f"no CAS number for {species.key}")


def _entry(key: str, table: Any, cas: str) -> dict[str, Any] | None:
    """The three constants of one compilation, or None where one of them is missing."""
    if cas not in table.index:
        return None
    row = table.loc[cas]
    values = {"temperature": row["Tc"], "pressure": row["Pc"], "acentric_factor": row.get("omega")}
    if any(value is None or value != value for value in values.values()):
        return None
    entry: dict[str, Any] = {name: float(value) for name, value in values.items()}
    return entry | {"critical_source": key, "acentric_source": key}


def constants_of(species: GasSpecies, real: dict[str, tuple[str, dict[str, Any]]]) -> dict[str, Any]:
    """Entry of one species; raises ValueError where nothing published is at hand."""
    cas = _cas(species)
    entry: dict[str, Any] | None = None
    if cas in real:
        file, data = real[cas]
        point, stated = data["critical_point"], data["stated_critical_temperature"]
        if abs(point["temperature"] / stated - 1) < _TRUE_CRITICAL:
            entry = {
                "temperature": point["temperature"],
                "pressure": point["pressure"],
                "acentric_factor": data["acentric_factor"],
                "critical_source": file,
                "acentric_source": file,
            }
    tables = critical.Tc_sources
    for key in _COMPLETE:
        entry = entry or _entry(key, tables[SOURCES[key][0]], cas)
    if entry is None:
        entry = _entry("yaws-2014", tables["YAWS"], cas)
        review = tables["MATTHEWS"]
        if entry and cas in review.index and review.loc[cas, "Pc"] == review.loc[cas, "Pc"]:
            entry["temperature"], entry["pressure"] = float(review.loc[cas, "Tc"]), float(review.loc[cas, "Pc"])
            entry["critical_source"] = "mathews-1972"
    if entry is None:
        raise ValueError(f"no critical constants for {species.key}")
    rackett = volume.rho_data_COSTALD
    if cas in rackett.index and rackett.loc[cas, "Z_RA"] == rackett.loc[cas, "Z_RA"]:
        entry["rackett_compressibility"] = float(rackett.loc[cas, "Z_RA"])
    _compare(species.key, entry, cas)
    return {"cas": cas} | entry


def _compare(key: str, entry: dict[str, Any], cas: str) -> None:
    for name in ("IUPAC", "MATTHEWS", "CRC", "PSRK"):
        table = critical.Tc_sources[name]
        if cas not in table.index:
            continue
        for quantity, column in (("temperature", "Tc"), ("pressure", "Pc")):
            other = table.loc[cas, column]
            if other == other and abs(entry[quantity] / other - 1) > _TOLD[quantity]:
                print(f"{key}: {quantity} {entry[quantity]:g} ({entry['critical_source']}), {name} has {other:g}")


def main() -> None:
    """Write the data file."""
    real = _real_fluids()
    entries: dict[str, Any] = {}
    for key, species in library().species.items():
        if key not in _WITHOUT:
            entries[key] = constants_of(species, real)
    used = {entry[part] for entry in entries.values() for part in ("critical_source", "acentric_source")}
    content = {
        "format": "reportgen-critical-constants/1",
        "collected_from": f"the real-fluid data files, and chemicals {version('chemicals')} (MIT)",
        "units": {"temperature": "K", "pressure": "Pa", "acentric_factor": "1", "rackett_compressibility": "1"},
        "sources": {key: text for key, (_, text) in SOURCES.items() if key in used}
        | {file: _publication(data) for file, data in real.values() if file in used},
        "rackett_source": RACKETT_SOURCE,
        "species": entries,
    }
    text = json.dumps(content, indent=1, ensure_ascii=False)
    TARGET.write_text(text + "\n", encoding="utf-8", newline="\n")
    for source in sorted(used):
        print(f"{sum(entry['critical_source'] == source for entry in entries.values()):4d} species from {source}")
    print(f"{len(entries)} species written to {TARGET.name}")


if __name__ == "__main__":
    main()
