"""Collects the NASA nine-coefficient polynomials of common gases into ``ideal_gases.json``.

Run by a maintainer, never by a user:

    python reportgen/fluids/data/collect_ideal_gases.py [--text thermo.inp]

The numbers are those of McBride, Zehe and Gordon, NASA/TP-2002-211556, as the ``cea`` package (Apache-2.0, by NASA)
carries them in its binary ``thermo.lib``. With ``--text`` every number is compared with the same species in the
published text form of the data base, and every interval with the limits printed there.

Facts about the source that matter here:

- chlorides and aluminium are spelt in capitals (HCL, CCL4), a star marks species of a certain kind (``*N2``);
- the standard state is the ideal gas at 1 bar;
- a revision of 2021 raised the lower limit of most common gases from 200 K to 300 K with the coefficients unchanged;
  ``thermo.lib`` holds one common set of intervals (200, 1000, 6000, 20 000 K), which is the published one, used here.
  The third interval is left out: dissociation makes it meaningless for a gas of fixed composition.
"""

from __future__ import annotations

import argparse
import json
import struct
from importlib.metadata import version
from importlib.resources import files
from pathlib import Path
from typing import Any

TARGET = Path(__file__).with_name("ideal_gases.json")

_RECORD = struct.Struct("<15si6s" + "2sd" * 5 + "iddd27d")
_HEADER = struct.Struct("<4d")
_COEFFICIENTS = 9
_INTERVALS = 2

#: Key of each species here, its spelling in the source, its name, and other names it goes by.
SPECIES: tuple[tuple[str, str, str, tuple[str, ...]], ...] = (
    # elements
    ("H2", "*H2", "hydrogen", ()),
    ("D2", "*D2", "deuterium", ()),
    ("He", "*He", "helium", ()),
    ("Ne", "*Ne", "neon", ()),
    ("Ar", "*Ar", "argon", ()),
    ("Kr", "*Kr", "krypton", ()),
    ("Xe", "*Xe", "xenon", ()),
    ("N2", "*N2", "nitrogen", ()),
    ("O2", "*O2", "oxygen", ()),
    ("O3", "O3", "ozone", ()),
    ("F2", "F2", "fluorine", ()),
    ("Cl2", "CL2", "chlorine", ()),
    ("Br2", "Br2", "bromine", ()),
    ("I2", "I2", "iodine", ()),
    ("S2", "S2", "disulfur", ()),
    ("Hg", "*Hg", "mercury", ()),
    ("H", "*H", "atomic hydrogen", ()),
    ("N", "*N", "atomic nitrogen", ()),
    ("O", "*O", "atomic oxygen", ()),
    ("OH", "*OH", "hydroxyl", ()),
    # inorganic compounds
    ("H2O", "H2O", "water", ("steam", "water vapour", "water vapor")),
    ("D2O", "D2O", "heavy water", ()),
    ("H2O2", "H2O2", "hydrogen peroxide", ()),
    ("CO", "*CO", "carbon monoxide", ()),
    ("CO2", "*CO2", "carbon dioxide", ("R744",)),
    ("COS", "COS", "carbonyl sulfide", ("OCS",)),
    ("CS2", "CS2", "carbon disulfide", ()),
    ("COCl2", "COCL2", "phosgene", ()),
    ("NO", "*NO", "nitric oxide", ("nitrogen monoxide",)),
    ("NO2", "NO2", "nitrogen dioxide", ()),
    ("N2O", "N2O", "nitrous oxide", ("dinitrogen monoxide",)),
    ("N2O4", "N2O4", "dinitrogen tetroxide", ()),
    ("HNO3", "HNO3", "nitric acid", ()),
    ("NH3", "NH3", "ammonia", ("R717",)),
    ("N2H4", "N2H4", "hydrazine", ()),
    ("HCN", "HCN", "hydrogen cyanide", ()),
    ("C2N2", "C2N2", "cyanogen", ()),
    ("SO2", "SO2", "sulfur dioxide", ("sulphur dioxide", "R764")),
    ("SO3", "SO3", "sulfur trioxide", ("sulphur trioxide",)),
    ("H2S", "H2S", "hydrogen sulfide", ("hydrogen sulphide",)),
    ("H2SO4", "H2SO4", "sulfuric acid", ("sulphuric acid",)),
    ("SF6", "SF6", "sulfur hexafluoride", ("sulphur hexafluoride",)),
    ("HF", "*HF", "hydrogen fluoride", ()),
    ("HCl", "HCL", "hydrogen chloride", ()),
    ("HBr", "HBr", "hydrogen bromide", ()),
    ("HI", "HI", "hydrogen iodide", ()),
    ("NF3", "NF3", "nitrogen trifluoride", ()),
    ("BF3", "BF3", "boron trifluoride", ()),
    ("BCl3", "BCL3", "boron trichloride", ()),
    ("PH3", "PH3", "phosphine", ()),
    ("SiH4", "SiH4", "silane", ()),
    ("SiF4", "SiF4", "silicon tetrafluoride", ()),
    ("SiCl4", "SiCL4", "silicon tetrachloride", ()),
    ("SiHCl3", "SiHCL3", "trichlorosilane", ()),
    # hydrocarbons
    ("CH4", "CH4", "methane", ("R50",)),
    ("C2H2", "C2H2,acetylene", "acetylene", ("ethyne",)),
    ("C2H4", "C2H4", "ethylene", ("ethene", "R1150")),
    ("C2H6", "C2H6", "ethane", ("R170",)),
    ("propyne", "C3H4,propyne", "propyne", ("methylacetylene",)),
    ("propadiene", "C3H4,allene", "propadiene", ("allene",)),
    ("propylene", "C3H6,propylene", "propylene", ("propene", "R1270")),
    ("cyclopropane", "C3H6,cyclo-", "cyclopropane", ()),
    ("C3H8", "C3H8", "propane", ("R290",)),
    ("1,3-butadiene", "C4H6,butadiene", "1,3-butadiene", ("butadiene",)),
    ("1-butyne", "C4H6,1butyne", "1-butyne", ()),
    ("2-butyne", "C4H6,2butyne", "2-butyne", ()),
    ("1-butene", "C4H8,1-butene", "1-butene", ()),
    ("cis-2-butene", "C4H8,cis2-buten", "cis-2-butene", ()),
    ("trans-2-butene", "C4H8,tr2-butene", "trans-2-butene", ()),
    ("isobutene", "C4H8,isobutene", "isobutene", ("isobutylene", "2-methylpropene")),
    ("n-butane", "C4H10,n-butane", "n-butane", ("butane", "R600")),
    ("isobutane", "C4H10,isobutane", "isobutane", ("i-butane", "2-methylpropane", "R600a")),
    ("1-pentene", "C5H10,1-pentene", "1-pentene", ()),
    ("cyclopentane", "C5H10,cyclo-", "cyclopentane", ()),
    ("n-pentane", "C5H12,n-pentane", "n-pentane", ("pentane", "R601")),
    ("isopentane", "C5H12,i-pentane", "isopentane", ("i-pentane", "2-methylbutane", "R601a")),
    ("neopentane", "CH3C(CH3)2CH3", "neopentane", ("2,2-dimethylpropane",)),
    ("C6H6", "C6H6", "benzene", ()),
    ("1-hexene", "C6H12,1-hexene", "1-hexene", ()),
    ("cyclohexane", "C6H12,cyclo-", "cyclohexane", ()),
    ("n-hexane", "C6H14,n-hexane", "n-hexane", ("hexane",)),
    ("C7H8", "C7H8", "toluene", ("methylbenzene",)),
    ("C7H16", "C7H16,n-heptane", "n-heptane", ("heptane",)),
    ("C8H8", "C8H8,styrene", "styrene", ()),
    ("ethylbenzene", "C8H10,ethylbenz", "ethylbenzene", ()),
    ("n-octane", "C8H18,n-octane", "n-octane", ("octane",)),
    ("isooctane", "C8H18,isooctane", "isooctane", ("2,2,4-trimethylpentane",)),
    ("C10H8", "C10H8,naphthale", "naphthalene", ()),
    ("C12H10", "C12H10,biphenyl", "biphenyl", ()),
    # oxygen and nitrogen in organic compounds
    ("CH3OH", "CH3OH", "methanol", ("methyl alcohol",)),
    ("ethanol", "C2H5OH", "ethanol", ("C2H5OH", "ethyl alcohol")),
    ("dimethyl ether", "CH3OCH3", "dimethyl ether", ("CH3OCH3", "DME", "RE170")),
    ("1-propanol", "C3H8O,1propanol", "1-propanol", ("n-propanol",)),
    ("2-propanol", "C3H8O,2propanol", "2-propanol", ("isopropanol",)),
    ("CH2O", "HCHO,formaldehy", "formaldehyde", ("HCHO",)),
    ("CH2O2", "HCOOH", "formic acid", ("HCOOH",)),
    ("acetaldehyde", "CH3CHO,ethanal", "acetaldehyde", ("ethanal", "CH3CHO")),
    ("ethylene oxide", "C2H4O,ethylen-o", "ethylene oxide", ("oxirane",)),
    ("C2H4O2", "CH3COOH", "acetic acid", ("CH3COOH",)),
    ("C3H6O", "C3H6O,acetone", "acetone", ()),
    ("C6H6O", "C6H5OH,phenol", "phenol", ("C6H5OH",)),
    ("C2H3N", "CH3CN", "acetonitrile", ("CH3CN",)),
    # halogenated hydrocarbons
    ("CH3Cl", "CH3CL", "chloromethane", ("methyl chloride", "R40")),
    ("CH2Cl2", "CH2CL2", "dichloromethane", ("methylene chloride", "R30")),
    ("CHCl3", "CHCL3", "chloroform", ("trichloromethane", "R20")),
    ("CCl4", "CCL4", "carbon tetrachloride", ("tetrachloromethane", "R10")),
    ("C2H3Cl", "C2H3CL", "vinyl chloride", ("chloroethylene",)),
    ("CH3Br", "CH3Br", "bromomethane", ("methyl bromide",)),
    ("CH3F", "CH3F", "fluoromethane", ("R41",)),
    ("CH2F2", "CH2F2", "difluoromethane", ("R32",)),
    ("CHF3", "CHF3", "trifluoromethane", ("R23",)),
    ("CF4", "CF4", "tetrafluoromethane", ("carbon tetrafluoride", "R14")),
    ("C2F4", "C2F4", "tetrafluoroethylene", ()),
    ("C2F6", "C2F6", "hexafluoroethane", ("R116",)),
    ("CHClF2", "CHF2CL", "chlorodifluoromethane", ("R22",)),
    ("CHCl2F", "CHFCL2", "dichlorofluoromethane", ("R21",)),
    ("CCl3F", "CFCL3", "trichlorofluoromethane", ("R11",)),
    ("CCl2F2", "CF2CL2", "dichlorodifluoromethane", ("R12",)),
    ("CClF3", "CF3CL", "chlorotrifluoromethane", ("R13",)),
    ("CBrF3", "CF3Br", "bromotrifluoromethane", ("R13B1", "halon 1301")),
)

#: The source's own reference codes: letters, then month/year of calculation or year of the volume.
_CODES = {
    "g": "calculated at NASA Glenn Research Center ({})",
    "j": "Chase, NIST-JANAF Thermochemical Tables, 4th edition, 1998 (table of {})",
    "tpis": "Gurvich et al., Thermodynamic Properties of Individual Substances (volume of 19{})",
    "n": "TRC Thermodynamic Tables, NIST (table of {})",
    "bar": "Barin, Thermochemical Data of Pure Substances (volume of 19{})",
    "coda": "Cox, Wagman, Medvedev, CODATA Key Values for Thermodynamics, 1989 (19{})",
    "srd": "Standard reference data, J. Phys. Chem. Ref. Data (19{})",
}

#: Dry air as the source defines it for its species "Air" (mole fractions).
_AIR = {"N2": 0.78084, "O2": 0.209476, "Ar": 0.009365, "CO2": 0.000319}
_AIR_SOURCE = "dry air of Gordon, NASA TP-1906, 1982, as used in NASA/TP-2002-211556"


def _records(data: bytes) -> list[bytes]:
    """Records of a sequential file, each between two equal byte counts."""
    records, position = [], 0
    while position < len(data):
        (size,) = struct.unpack_from("<i", data, position)
        body = data[position + 4 : position + 4 + size]
        if struct.unpack_from("<i", data, position + 4 + size) != (size,):
            raise ValueError(f"record at byte {position} is damaged")
        records.append(body)
        position += size + 8
    return records


def _reference(code: str) -> str:
    letters = next(key for key in sorted(_CODES, key=len, reverse=True) if code.lower().startswith(key))
    return _CODES[letters].format(code[len(letters) :].strip().replace(" ", ""))


def collect(data: bytes) -> dict[str, Any]:
    """Content of ``ideal_gases.json`` from the bytes of ``thermo.lib``."""
    first, *others = _records(data)
    breaks = _HEADER.unpack_from(first)
    gases = {}
    for body in others:
        if len(body) == _RECORD.size:
            fields = _RECORD.unpack(body)
            gases[fields[0].decode("ascii").strip()] = fields
    species: dict[str, Any] = {}
    for key, spelling, name, aliases in SPECIES:
        fields = gases[spelling]
        intervals, code = fields[1], fields[2].decode("ascii").strip()
        if intervals < _INTERVALS:
            raise ValueError(f"{spelling} has {intervals} interval(s), {_INTERVALS} are needed")
        atoms = {
            symbol.decode("ascii").strip().capitalize(): int(count)
            for symbol, count in zip(fields[3:13:2], fields[4:13:2], strict=True)
            if count
        }
        species[key] = {
            "name": name,
            "aliases": list(aliases),
            "atoms": atoms,
            "molar_mass": fields[16],
            "coefficients": [
                list(fields[17 + number * _COEFFICIENTS : 17 + (number + 1) * _COEFFICIENTS])
                for number in range(_INTERVALS)
            ],
            "source": _reference(code),
        }
    return {
        "source": "McBride, Zehe and Gordon, NASA Glenn Coefficients for Calculating Thermodynamic Properties of "
        "Individual Species, NASA/TP-2002-211556, 2002, https://ntrs.nasa.gov/citations/20020085330",
        "collected_from": f"cea {version('cea')}, thermo.lib (Apache-2.0)",
        "form": "cp/R = a1/T^2 + a2/T + a3 + a4 T + a5 T^2 + a6 T^3 + a7 T^4; then b1 (enthalpy), b2 (entropy)",
        "units": {"molar_mass": "g/mol", "temperature": "K"},
        "standard_pressure": 100000.0,
        "temperature_breaks": list(breaks[: _INTERVALS + 1]),
        "mixtures": {"air": {"aliases": ["dry air"], "mole_fractions": _AIR, "source": _AIR_SOURCE}},
        "species": species,
    }


def compare(content: dict[str, Any], text: str) -> list[str]:
    """Differences between the collected numbers and the text form of the data base."""
    lines = text.splitlines()
    # The block behind the line "Air" holds reactants given at one temperature; names repeat there.
    end = next(number for number, line in enumerate(lines) if line.startswith("Air "))
    starts: dict[str, int] = {}
    for number, line in enumerate(lines[:end]):
        if line[:1].strip() and not line.startswith("!"):
            starts.setdefault(line[:18].split()[0] if line[:18].strip() else "", number)
    found = []
    for key, spelling, _, _ in SPECIES:
        start = starts.get(spelling.lstrip("*"))
        if start is None:
            found.append(f"{key}: not in the text")
            continue
        if abs(float(lines[start + 1][52:65]) - content["species"][key]["molar_mass"]) > 1e-6:
            found.append(f"{key}: molar mass {lines[start + 1][52:65]}")
        for interval in range(_INTERVALS):
            limits, upper, lower = lines[start + 2 + 3 * interval : start + 5 + 3 * interval]
            printed = [float(limits[1:11]), float(limits[11:22])]
            if printed != content["temperature_breaks"][interval : interval + 2]:
                found.append(f"{key}: interval {printed}")
            cuts = [upper[i : i + 16] for i in range(0, 80, 16)] + [lower[i : i + 16] for i in (0, 16, 48, 64)]
            numbers = [float(cut.replace("D", "e").replace("d", "e")) for cut in cuts]
            for position, (ours, theirs) in enumerate(
                zip(content["species"][key]["coefficients"][interval], numbers, strict=True)
            ):
                if abs(ours - theirs) > 1e-12 * abs(theirs):
                    found.append(f"{key}: interval {interval + 1}, number {position + 1}: {ours} against {theirs}")
    return found


def main() -> None:
    """Write the data file; compare it with the text form when that is given."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--text", type=Path, help="text form of the data base to compare with")
    arguments = parser.parse_args()
    content = collect((files("cea") / "data" / "thermo.lib").read_bytes())
    if arguments.text:
        differences = compare(content, arguments.text.read_text(encoding="ascii", errors="replace"))
        print(*differences, sep="\n")
        print(f"{len(content['species'])} species compared, {len(differences)} differences")
    text = json.dumps(content, indent=1, ensure_ascii=False)
    TARGET.write_text(text + "\n", encoding="utf-8", newline="\n")
    print(f"{len(content['species'])} species written to {TARGET.name}")


if __name__ == "__main__":
    main()
