"""The real fluids to collect: names for people, and the range that each publication claims (used by a maintainer).

Read by collect.py. A fluid is one entry here.
"""

from __future__ import annotations

from typing import NamedTuple

__all__ = ["FLUIDS", "LOWER_LIMIT", "Entry", "file_of"]

#: What the lowest temperature is where the collected range ends above the triple point.
LOWER_LIMIT = "lower limit of the collected range"


class Entry(NamedTuple):
    """One fluid.

    ``source`` is its name in the source, ``name`` the canonical one here, ``title`` the one for people, ``refrigerant``
    its number by ASHRAE 34 (empty where it has none that is in use), ``aliases`` further names in use.
    ``claimed`` is the highest temperature [K] that the publication claims, from its title or abstract (some from
    memory, and then the same as the limit of the source); None where that is not recorded. The limit of the source is
    often higher: between the two the equation is extrapolated.
    ``starts_at`` says what the lowest temperature is, where it is not a triple point; ``remark`` is a sentence for the
    reader. ``join``: where the published lines of a pseudo-pure fluid are led to the equation's own critical point, see
    collect_saturation.joined_curves.
    """

    source: str
    name: str
    title: str
    refrigerant: str = ""
    aliases: tuple[str, ...] = ()
    claimed: float | None = None
    starts_at: str = ""
    remark: str = ""
    join: tuple[float, float] | None = None


def file_of(name: str) -> str:
    """Name of the data file of the fluid called ``name``."""
    plain = "".join(letter if letter.isalnum() else " " for letter in name)
    return "-".join(plain.split()) + ".json"


_LAMBDA = "lambda point"
_HELIUM = "The range begins at the lambda point of the saturated liquid; superfluid helium is not covered."
_ORTHO = "A form that does not exist by itself in equilibrium: for mixing rules and studies of conversion."
_ONE_LINE = " Only one saturation pressure is collected; it stands for both lines."
_UNPUBLISHED = "The equation has been distributed by its authors without a full publication."

FLUIDS = (
    Entry("1-Butene", "1-butene", "1-Butene", "", ("but-1-ene", "butylene")),
    Entry("Acetone", "acetone", "Acetone", "", ("propanone", "2-propanone")),
    Entry("Air", "air", "Air", "R729", ("dry air",), 2000.0),
    Entry("Ammonia", "ammonia", "Ammonia", "R717", (), 725.0),
    Entry("Argon", "argon", "Argon", "R740", (), 700.0),
    Entry("Benzene", "benzene", "Benzene", "", (), 725.0),
    Entry("CarbonDioxide", "carbon dioxide", "Carbon dioxide", "R744", (), 1100.0),
    Entry("CarbonMonoxide", "carbon monoxide", "Carbon monoxide"),
    Entry("CarbonylSulfide", "carbonyl sulfide", "Carbonyl sulfide", "", ("carbonyl sulphide", "OCS")),
    Entry("Chlorine", "chlorine", "Chlorine", "", (), 440.0),
    Entry("cis-2-Butene", "cis-2-butene", "cis-2-Butene", "", ("(Z)-2-butene",)),
    Entry("CycloHexane", "cyclohexane", "Cyclohexane", "", (), 700.0),
    Entry("Cyclopentane", "cyclopentane", "Cyclopentane"),
    Entry("CycloPropane", "cyclopropane", "Cyclopropane", "RC270"),
    Entry("D4", "octamethylcyclotetrasiloxane", "Octamethylcyclotetrasiloxane (D4)", "", ("D4",), 1200.0),
    Entry("D5", "decamethylcyclopentasiloxane", "Decamethylcyclopentasiloxane (D5)", "", ("D5",)),
    Entry("D6", "dodecamethylcyclohexasiloxane", "Dodecamethylcyclohexasiloxane (D6)", "", ("D6",)),
    Entry("Deuterium", "deuterium", "Deuterium (normal)", "", ("D2", "normal deuterium"), 600.0),
    Entry("Dichloroethane", "1,2-dichloroethane", "1,2-Dichloroethane", "R150", ("ethylene dichloride", "EDC")),
    Entry("DiethylEther", "diethyl ether", "Diethyl ether", "R610", ("ethyl ether", "ethoxyethane", "DEE")),
    Entry("DimethylCarbonate", "dimethyl carbonate", "Dimethyl carbonate", "", ("DMC",), 600.0),
    Entry("DimethylEther", "dimethyl ether", "Dimethyl ether", "RE170", ("methoxymethane", "DME"), 525.0),
    Entry("Ethane", "ethane", "Ethane", "R170", (), 675.0),
    Entry("Ethanol", "ethanol", "Ethanol", "", ("ethyl alcohol",), 650.0),
    Entry("EthylBenzene", "ethylbenzene", "Ethylbenzene", "", (), 700.0),
    Entry("Ethylene", "ethylene", "Ethylene", "R1150", ("ethene",), 450.0),
    Entry("EthyleneOxide", "ethylene oxide", "Ethylene oxide", "", ("oxirane",)),
    Entry("Fluorine", "fluorine", "Fluorine"),
    Entry("HeavyWater", "heavy water", "Heavy water", "", ("deuterium oxide",), 825.0),
    Entry("Helium", "helium", "Helium", "R704", ("helium-4",), None, _LAMBDA, _HELIUM),
    Entry("HFE143m", "RE143a", "Methyl trifluoromethyl ether (RE143a)", "RE143a", ("HFE-143m",), None, LOWER_LIMIT),
    Entry("Hydrogen", "hydrogen", "Hydrogen (normal)", "R702", ("H2", "normal hydrogen", "n-hydrogen"), 1000.0),
    Entry("HydrogenChloride", "hydrogen chloride", "Hydrogen chloride"),
    Entry("HydrogenSulfide", "hydrogen sulfide", "Hydrogen sulfide", "", ("hydrogen sulphide",)),
    Entry("IsoButane", "isobutane", "Isobutane", "R600a", ("2-methylpropane", "i-butane", "iC4"), 575.0),
    Entry("IsoButene", "isobutene", "Isobutene", "", ("isobutylene", "2-methylpropene", "i-butene")),
    Entry("Isohexane", "isohexane", "Isohexane", "", ("2-methylpentane", "i-hexane", "iC6")),
    Entry("Isopentane", "isopentane", "Isopentane", "R601a", ("2-methylbutane", "i-pentane", "iC5")),
    Entry("Krypton", "krypton", "Krypton"),
    Entry("m-Xylene", "m-xylene", "m-Xylene", "", ("1,3-dimethylbenzene", "meta-xylene"), 700.0),
    Entry("MD2M", "decamethyltetrasiloxane", "Decamethyltetrasiloxane (MD2M)", "", ("MD2M",), 600.0),
    Entry("MD3M", "dodecamethylpentasiloxane", "Dodecamethylpentasiloxane (MD3M)", "", ("MD3M",)),
    Entry("MD4M", "tetradecamethylhexasiloxane", "Tetradecamethylhexasiloxane (MD4M)", "", ("MD4M",)),
    Entry("MDM", "octamethyltrisiloxane", "Octamethyltrisiloxane (MDM)", "", ("MDM",), 600.0),
    Entry("Methane", "methane", "Methane", "R50", (), 625.0),
    Entry("Methanol", "methanol", "Methanol", "", ("methyl alcohol",)),
    Entry("MethylLinoleate", "methyl linoleate", "Methyl linoleate"),
    Entry("MethylLinolenate", "methyl linolenate", "Methyl linolenate"),
    Entry("MethylOleate", "methyl oleate", "Methyl oleate"),
    Entry("MethylPalmitate", "methyl palmitate", "Methyl palmitate"),
    Entry("MethylStearate", "methyl stearate", "Methyl stearate"),
    Entry("MM", "hexamethyldisiloxane", "Hexamethyldisiloxane (MM)", "", ("MM",)),
    Entry("n-Butane", "n-butane", "n-Butane", "R600", ("butane", "nC4", "n-C4H10"), 575.0),
    Entry("n-Decane", "n-decane", "n-Decane", "", ("decane", "nC10", "n-C10H22")),
    Entry("n-Dodecane", "n-dodecane", "n-Dodecane", "", ("dodecane", "nC12", "n-C12H26"), 700.0),
    Entry("n-Heptane", "n-heptane", "n-Heptane", "", ("heptane", "nC7", "n-C7H16")),
    Entry("n-Hexane", "n-hexane", "n-Hexane", "", ("hexane", "nC6", "n-C6H14")),
    Entry("n-Nonane", "n-nonane", "n-Nonane", "", ("nonane", "nC9", "n-C9H20")),
    Entry("n-Octane", "n-octane", "n-Octane", "", ("octane", "nC8", "n-C8H18"), 650.0),
    Entry("n-Pentane", "n-pentane", "n-Pentane", "R601", ("pentane", "nC5", "n-C5H12")),
    Entry("n-Perfluorobutane", "perfluorobutane", "Perfluorobutane", "", ("n-perfluorobutane", "decafluorobutane")),
    Entry(
        "n-Perfluorohexane", "perfluorohexane", "Perfluorohexane", "", ("n-perfluorohexane", "tetradecafluorohexane")
    ),
    Entry(
        "n-Perfluoropentane", "perfluoropentane", "Perfluoropentane", "", ("n-perfluoropentane", "dodecafluoropentane")
    ),
    Entry("n-Propane", "propane", "Propane", "R290", ("n-propane", "n-C3H8"), 650.0),
    Entry("n-Undecane", "n-undecane", "n-Undecane", "", ("undecane", "nC11", "n-C11H24")),
    Entry("Neon", "neon", "Neon", "R720", (), 700.0),
    Entry("Neopentane", "neopentane", "Neopentane", "", ("2,2-dimethylpropane",)),
    Entry("Nitrogen", "nitrogen", "Nitrogen", "R728", (), 1000.0),
    Entry("NitrousOxide", "nitrous oxide", "Nitrous oxide", "R744A", ("dinitrogen monoxide",)),
    Entry(
        "Novec649",
        "FK-5-1-12",
        "Dodecafluoro-2-methylpentan-3-one (FK-5-1-12)",
        "",
        ("Novec 649", "Novec 1230", "1,1,1,2,2,4,5,5,5-nonafluoro-4-(trifluoromethyl)-3-pentanone"),
    ),
    Entry("o-Xylene", "o-xylene", "o-Xylene", "", ("1,2-dimethylbenzene", "ortho-xylene"), 700.0),
    Entry("OrthoDeuterium", "orthodeuterium", "Orthodeuterium", "", ("ortho-deuterium", "o-D2"), 600.0),
    Entry("OrthoHydrogen", "orthohydrogen", "Orthohydrogen", "", ("ortho-hydrogen", "o-H2"), 1000.0, "", _ORTHO),
    Entry("Oxygen", "oxygen", "Oxygen", "R732", (), 300.0),
    Entry("p-Xylene", "p-xylene", "p-Xylene", "", ("1,4-dimethylbenzene", "para-xylene"), 700.0),
    Entry("ParaDeuterium", "paradeuterium", "Paradeuterium", "", ("para-deuterium", "p-D2"), 600.0, "", _ORTHO),
    Entry("ParaHydrogen", "parahydrogen", "Parahydrogen", "R702p", ("para-hydrogen", "p-H2"), 1000.0),
    Entry("Propylene", "propylene", "Propylene", "R1270", ("propene",), None, "", _UNPUBLISHED),
    Entry("PropyleneGlycol", "propylene glycol", "Propylene glycol", "", ("1,2-propanediol", "propane-1,2-diol")),
    Entry("Propyne", "propyne", "Propyne", "", ("methylacetylene",)),
    Entry("R11", "R11", "Trichlorofluoromethane (R11)", "R11", ("trichlorofluoromethane",)),
    Entry("R1123", "R1123", "Trifluoroethene (R1123)", "R1123", ("trifluoroethene", "trifluoroethylene")),
    Entry("R113", "R113", "1,1,2-Trichloro-1,2,2-trifluoroethane (R113)", "R113", ("trichlorotrifluoroethane",), 525.0),
    Entry("R1130(E)", "R1130(E)", "trans-1,2-Dichloroethene (R1130(E))", "R1130(E)", ("trans-1,2-dichloroethene",)),
    Entry(
        "R1132(E)",
        "R1132(E)",
        "trans-1,2-Difluoroethene (R1132(E))",
        "R1132(E)",
        ("trans-1,2-difluoroethene",),
        None,
        LOWER_LIMIT,
    ),
    Entry("R114", "R114", "1,2-Dichloro-1,1,2,2-tetrafluoroethane (R114)", "R114", ("dichlorotetrafluoroethane",)),
    Entry("R115", "R115", "Chloropentafluoroethane (R115)", "R115", ("chloropentafluoroethane",)),
    Entry("R116", "R116", "Hexafluoroethane (R116)", "R116", ("hexafluoroethane", "perfluoroethane")),
    Entry("R12", "R12", "Dichlorodifluoromethane (R12)", "R12", ("dichlorodifluoromethane",), 525.0),
    Entry("R1224YDZ", "R1224yd(Z)", "cis-1-Chloro-2,3,3,3-tetrafluoropropene (R1224yd(Z))", "R1224yd(Z)"),
    Entry("R123", "R123", "2,2-Dichloro-1,1,1-trifluoroethane (R123)", "R123", ("dichlorotrifluoroethane",)),
    Entry("R1233zd(E)", "R1233zd(E)", "trans-1-Chloro-3,3,3-trifluoropropene (R1233zd(E))", "R1233zd(E)", (), 450.0),
    Entry("R1234yf", "R1234yf", "2,3,3,3-Tetrafluoropropene (R1234yf)", "R1234yf"),
    Entry("R1234ze(E)", "R1234ze(E)", "trans-1,3,3,3-Tetrafluoropropene (R1234ze(E))", "R1234ze(E)"),
    Entry(
        "R1234ze(Z)", "R1234ze(Z)", "cis-1,3,3,3-Tetrafluoropropene (R1234ze(Z))", "R1234ze(Z)", (), 440.0, LOWER_LIMIT
    ),
    Entry("R124", "R124", "1-Chloro-1,2,2,2-tetrafluoroethane (R124)", "R124"),
    Entry("R1243zf", "R1243zf", "3,3,3-Trifluoropropene (R1243zf)", "R1243zf"),
    Entry("R125", "R125", "Pentafluoroethane (R125)", "R125", ("pentafluoroethane",), 500.0),
    Entry("R13", "R13", "Chlorotrifluoromethane (R13)", "R13", ("chlorotrifluoromethane",)),
    Entry("R1336mzz(E)", "R1336mzz(E)", "trans-1,1,1,4,4,4-Hexafluoro-2-butene (R1336mzz(E))", "R1336mzz(E)"),
    Entry("R1336mzz(Z)", "R1336mzz(Z)", "cis-1,1,1,4,4,4-Hexafluoro-2-butene (R1336mzz(Z))", "R1336mzz(Z)"),
    Entry("R134a", "R134a", "1,1,1,2-Tetrafluoroethane (R134a)", "R134a", (), 455.0),
    Entry("R13I1", "R13I1", "Trifluoroiodomethane (R13I1)", "R13I1", ("trifluoroiodomethane",)),
    Entry("R14", "R14", "Tetrafluoromethane (R14)", "R14", ("tetrafluoromethane", "carbon tetrafluoride")),
    Entry("R141b", "R141b", "1,1-Dichloro-1-fluoroethane (R141b)", "R141b"),
    Entry("R142b", "R142b", "1-Chloro-1,1-difluoroethane (R142b)", "R142b"),
    Entry("R143a", "R143a", "1,1,1-Trifluoroethane (R143a)", "R143a", (), 450.0),
    Entry("R152A", "R152a", "1,1-Difluoroethane (R152a)", "R152a"),
    Entry("R161", "R161", "Fluoroethane (R161)", "R161", ("ethyl fluoride",)),
    Entry("R21", "R21", "Dichlorofluoromethane (R21)", "R21", ("dichlorofluoromethane",)),
    Entry("R218", "R218", "Octafluoropropane (R218)", "R218", ("perfluoropropane",)),
    Entry("R22", "R22", "Chlorodifluoromethane (R22)", "R22", ("chlorodifluoromethane",)),
    Entry("R227EA", "R227ea", "1,1,1,2,3,3,3-Heptafluoropropane (R227ea)", "R227ea"),
    Entry("R23", "R23", "Trifluoromethane (R23)", "R23", ("trifluoromethane", "fluoroform")),
    Entry("R236EA", "R236ea", "1,1,1,2,3,3-Hexafluoropropane (R236ea)", "R236ea"),
    Entry("R236FA", "R236fa", "1,1,1,3,3,3-Hexafluoropropane (R236fa)", "R236fa"),
    Entry("R245ca", "R245ca", "1,1,2,2,3-Pentafluoropropane (R245ca)", "R245ca"),
    Entry("R245fa", "R245fa", "1,1,1,3,3-Pentafluoropropane (R245fa)", "R245fa"),
    Entry("R32", "R32", "Difluoromethane (R32)", "R32", ("difluoromethane",), 435.0),
    Entry("R365MFC", "R365mfc", "1,1,1,3,3-Pentafluorobutane (R365mfc)", "R365mfc"),
    Entry("R40", "R40", "Chloromethane (R40)", "R40", ("methyl chloride", "chloromethane")),
    Entry("R404A", "R404A", "R404A (R125, R143a and R134a)", "R404A", starts_at=LOWER_LIMIT),
    Entry("R407C", "R407C", "R407C (R32, R125 and R134a)", "R407C", starts_at=LOWER_LIMIT),
    Entry("R41", "R41", "Fluoromethane (R41)", "R41", ("fluoromethane", "methyl fluoride")),
    Entry("R410A", "R410A", "R410A (R32 and R125)", "R410A", starts_at=LOWER_LIMIT, join=(1e-3, 2e-4)),
    Entry("R507A", "R507A", "R507A (R125 and R143a)", "R507A", ("R507",), starts_at=LOWER_LIMIT, join=(1e-3, 2e-4)),
    Entry("RC318", "RC318", "Octafluorocyclobutane (RC318)", "RC318", ("perfluorocyclobutane",)),
    Entry(
        "SES36",
        "SES36",
        "SES36 (R365mfc and a perfluoropolyether)",
        "",
        (),
        None,
        LOWER_LIMIT,
        _UNPUBLISHED + _ONE_LINE,
        (1e-2, 3e-3),
    ),
    Entry("SulfurDioxide", "sulfur dioxide", "Sulfur dioxide", "R764", ("sulphur dioxide",)),
    Entry("SulfurHexafluoride", "sulfur hexafluoride", "Sulfur hexafluoride", "", ("sulphur hexafluoride",), 625.0),
    Entry("Tetrahydrofuran", "tetrahydrofuran", "Tetrahydrofuran", "", ("THF", "oxolane")),
    Entry("Toluene", "toluene", "Toluene", "", ("methylbenzene",)),
    Entry("trans-2-Butene", "trans-2-butene", "trans-2-Butene", "", ("(E)-2-butene",)),
    Entry("VinylChloride", "vinyl chloride", "Vinyl chloride", "R1140", ("chloroethene", "VCM"), 430.0),
    Entry("Water", "water", "Water", "R718", ("steam",), 1273.0),
    Entry("Xenon", "xenon", "Xenon"),
)
