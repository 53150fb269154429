"""Terms of equations as the source writes them, turned into those of the data files."""

from __future__ import annotations

from typing import Any

#: Kinds of terms: name in the source -> name here (terms.py) and the columns carried.
RESIDUAL = {
    "Power": ("power", "ndtl"),
    "Exponential": ("exponential", "ndtgl"),
    "Gaussian": ("gaussian", ("n", "d", "t", "eta", "epsilon", "beta", "gamma")),
    "GaoB": ("gao-b", ("n", "d", "t", "eta", "epsilon", "beta", "gamma", "b")),
    "Lemmon2005": ("lemmon-2005", "ndtlm"),
    "DoubleExponential": ("double-exponential", ("n", "d", "t", "gd", "ld", "gt", "lt")),
    "NonAnalytic": ("non-analytic", ("n", "a", "b", "beta", "A", "B", "C", "D")),
}
IDEAL = {
    "Lead": ("lead", ("a1", "a2")),
    "LogTau": ("log-tau", "a"),
    "Power": ("power", "nt"),
    "PlanckEinstein": ("planck-einstein", "nt"),
    "PlanckEinsteinFunctionT": ("planck-einstein-temperature", "nv"),
    "PlanckEinsteinGeneralized": ("planck-einstein-generalized", "ntcd"),
    "CP0Constant": ("heat-capacity-constant", ("cp_over_R", "T0")),
    "CP0AlyLee": ("heat-capacity-aly-lee", ("c", "T0")),
    "CP0PolyT": ("heat-capacity-polynomial", ("c", "t", "T0")),
}
RENAMED = {"cp_over_R": "c", "gd": "density_rate", "ld": "density_power", "gt": "temperature_rate"} | {
    "lt": "temperature_power"
}
OFFSET = "IdealGasHelmholtzEnthalpyEntropyOffset"


def terms_of(source: list[dict[str, Any]], known: dict[str, Any], prefix: str) -> list[dict[str, Any]]:
    """Terms under our names; a kind that is not carried raises KeyError."""
    result = []
    for term in source:
        kind, columns = known[term["type"].removeprefix(prefix)]
        result.append({"kind": kind} | {RENAMED.get(name, name): term[name] for name in columns})
    return result


def has_constants(source: list[dict[str, Any]]) -> bool:
    """Whether the terms carry the integration constants published.

    They do not where both constants of the lead term are zero and no other term holds them, nor where terms are given
    as a heat capacity, whose integration leaves constants of its own.
    """
    if any(term.get("reference") == "CUSTOM" for term in source):
        return True  # an offset not to a common convention: the source says that it is the publication's
    if any("CP0" in term["type"] for term in source):
        return all(term["type"] != OFFSET for term in source)
    return any(
        (term["type"].endswith("Lead") and (term["a1"] or term["a2"]))
        or (term["type"].endswith("HelmholtzPower") and {0, 1} & set(term["t"]))
        for term in source
    )


def ideal_terms(source: list[dict[str, Any]]) -> list[dict[str, Any]]:
    """Ideal part with the publication's own zero.

    The source adds offsets to reach its default zero; they are left out, except where the integration constants
    published are not carried.
    """
    plain = [term for term in source if term["type"] != OFFSET]
    if not has_constants(source) or any(term.get("reference") == "CUSTOM" for term in source):
        plain += [term | {"type": "IdealGasHelmholtzLead"} for term in source if term["type"] == OFFSET]
    return terms_of(plain, IDEAL, "IdealGasHelmholtz")
