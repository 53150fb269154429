"""A property model of which every answer is known in closed form, independent of the program's own fluids."""

from __future__ import annotations

from types import SimpleNamespace
from typing import Any

import numpy as np

from reportgen.errors import Fault, InputError


class SimpleGas:
    """Ideal gas with constant c_p and R [J/(kg K)]; h = 0 and s = 0 at 298.15 K, 1 bar."""

    kind = "ideal-gas"
    entropy_zero = "298.15 K, 1 bar"
    sources = ("test",)
    data_files = ()
    composition = None

    def __init__(self, substance: str = "gas", cp: float = 1004.5, constant: float = 287.0) -> None:
        self.substance = self.title = substance
        self.entropy_zero_name = f"298.15 K:{substance}"
        self.cp, self.gas_constant = cp, constant
        self.molar_mass = 8.314462618 / constant
        self.limits = SimpleNamespace(minimum_temperature=50.0, maximum_temperature=3000.0, maximum_pressure=1e9)
        self.calls = 0

    def at(self, errors: str = "raise", **pair: Any) -> Any:
        self.calls += 1
        names = set(pair)
        values = dict(zip(pair, np.broadcast_arrays(*(np.asarray(v, float) for v in pair.values())), strict=True))
        cp, constant = self.cp, self.gas_constant
        with np.errstate(all="ignore"):
            if "pressure" in names:
                p = values["pressure"]
                if "temperature" in names:
                    t = values["temperature"]
                elif "specific_enthalpy" in names:
                    t = 298.15 + values["specific_enthalpy"] / cp
                elif "specific_entropy" in names:
                    t = 298.15 * np.exp((values["specific_entropy"] + constant * np.log(p / 1e5)) / cp)
                elif "density" in names:
                    t = p / (constant * values["density"])
                else:
                    raise InputError("unsupported pair")
            elif names == {"temperature", "specific_entropy"}:
                t = values["temperature"]
                p = 1e5 * np.exp((cp * np.log(t / 298.15) - values["specific_entropy"]) / constant)
            elif names == {"temperature", "density"}:
                t = values["temperature"]
                p = values["density"] * constant * t
            else:
                raise InputError("unsupported pair")
            bad = ~((t > 50.0) & (t < 3000.0) & (p > 0.0))
            given_nan = np.isnan(p) | np.isnan(t)
            p, t = np.where(bad, np.nan, p), np.where(bad, np.nan, t)
            rho = p / (constant * t)
        nothing = np.full(np.shape(p), np.nan)
        flags = np.flatnonzero(bad & ~given_nan)
        return SimpleNamespace(
            pressure=p,
            temperature=t,
            specific_enthalpy=cp * (t - 298.15),
            specific_entropy=cp * np.log(t / 298.15) - constant * np.log(p / 1e5),
            specific_internal_energy=cp * (t - 298.15) - constant * t,
            density=rho,
            specific_volume=1.0 / rho,
            quality=nothing,
            superheat=nothing,
            subcooling=nothing,
            compressibility_factor=np.ones(np.shape(p)),
            isobaric_heat_capacity=np.full(np.shape(p), cp),
            isochoric_heat_capacity=np.full(np.shape(p), cp - constant),
            speed_of_sound=np.sqrt(cp / (cp - constant) * constant * t),
            phase=np.full(np.shape(p), "gas"),
            faults={int(i): Fault("outside 50 to 3000 K") for i in flags},
        )
