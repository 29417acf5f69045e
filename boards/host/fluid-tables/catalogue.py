"""The fluids, their boxes, scales and uncertainties, with the basis of each number.

Scales. A gas table keeps the temperature and pressure shape of its formulation and is multiplied by (recommended dilute
viscosity at 298.15 K) / (the formulation's). The recommended values are those of Berg & Moldover, J. Phys. Chem. Ref.
Data 41 (2012) 043104; the three for nitrogen, krypton and xenon were seen as reference constants of later
formulations, THE OTHERS ARE FROM MEMORY and are marked so in the generated files.

Not scaled. That paper has no value for air, oxygen or carbon dioxide.
- Carbon dioxide's formulation (2017) is itself anchored to modern dilute-gas measurements.
- Air and oxygen stay as Lemmon & Jacobsen (2004) give them. The same formulation is 0.24 % above the recommended value
  for nitrogen and 0.18 % for argon (the latter from memory), so air is probably high by about as much,
          but no recommended
  number for air or oxygen was at hand, and a correction guessed from its constituents would be worse to defend than
  the stated uncertainty that covers it.
- Water is the IAPWS formulation as it stands.
"""

from dataclasses import dataclass

LEMMON_JACOBSEN = "Lemmon & Jacobsen, Int. J. Thermophys. 25 (2004) 21"


@dataclass(frozen=True)
class Fluid:
    name: str
    library: str
    celsius: tuple
    pascals: tuple
    viscosity_source: str
    density_source: str
    u_viscosity: float
    u_ratio: float
    uncertainty_basis: str
    recommended: float = 0.0  # Pa s at 298.15 K and zero density; 0 = not scaled
    seen: bool = False
    phase: str = "gas"

    @property
    def box(self):
        return tuple(c + 273.15 for c in self.celsius)

    @property
    def scale_basis(self):
        if not self.recommended:
            return "not scaled"
        return "Berg & Moldover 2012, " + ("printed value" if self.seen else "from memory")


WIDE, MEGA = (-40.0, 150.0), (1e3, 1e6)
ABSOLUTE = "viscosity: scaled at 298.15 K to a recommended value of 0.08-0.1 % standard uncertainty; "
SHAPE = ("ratio: measured ratios mu(T)/mu(298.15 K) are known to 0.024-0.077 % (May, Berg, Moldover 2007), widened "
         "because the shape here is another formulation's")
UNKNOWN_SHAPE = "ratio: judgement, the formulation states about 2 % and its shape was not compared with a better one"

FLUIDS = [
    Fluid("nitrogen", "Nitrogen", WIDE, MEGA, LEMMON_JACOBSEN, "Span et al., J. Phys. Chem. Ref. Data 29 (2000) 1361",
          0.0008, 0.0005, ABSOLUTE + SHAPE, 17.7494e-6, True),
    Fluid("air", "Air", WIDE, MEGA, LEMMON_JACOBSEN, "Lemmon et al., J. Phys. Chem. Ref. Data 29 (2000) 331",
          0.003, 0.001, "viscosity: judgement; the same formulation is 0.24 % high for nitrogen at 298.15 K, which "
          "is 78 % "
          "of air; ratio: judgement, twice that of nitrogen"),
    Fluid("argon", "Argon", WIDE, MEGA, LEMMON_JACOBSEN, "Tegeler, Span, Wagner, J. Phys. Chem. Ref. Data 28 (1999) "
          "779",
          0.001, 0.0005, ABSOLUTE + SHAPE, 22.5666e-6),
    Fluid("helium", "Helium", WIDE, MEGA, "Arp, McCarty, Friend, NIST TN 1334 (1998)",
          "Ortiz-Vega et al. (2019), unpublished when the library took it over", 0.001, 0.001,
          ABSOLUTE + "ratio: judgement, the formulation predates the measured ratios", 19.8253e-6),
    Fluid("oxygen", "Oxygen", WIDE, MEGA, LEMMON_JACOBSEN, "Schmidt & Wagner, Fluid Phase Equilib. 19 (1985) 175",
          0.005, 0.002, "viscosity: judgement; the source states generally within 5 %, its dilute gas is about ten "
          "times "
          "better (from memory) and its nitrogen and argon are 0.24 % and 0.18 % high (argon's against a value from memory); ratio: judgement"),
    Fluid("hydrogen", "Hydrogen", WIDE, MEGA, "Muzny, Huber, Kazakov, J. Chem. Eng. Data 58 (2013) 969",
          "Leachman et al., J. Phys. Chem. Ref. Data 38 (2009) 721 (normal hydrogen)", 0.001, 0.0005,
          ABSOLUTE + "ratio: 0.1 % stated for 200-400 K (from memory), and the measured ratios of May, Berg, "
          "Moldover 2007",
          8.8997e-6),
    Fluid("carbon-dioxide", "CarbonDioxide", (-20.0, 150.0), (1e3, 9e5),
          "Laesecke & Muzny, J. Phys. Chem. Ref. Data 46 (2017) 013107",
          "Span & Wagner, J. Phys. Chem. Ref. Data 25 (1996) 1509", 0.001, 0.001,
          "viscosity: 0.2 % expanded, dilute gas, stated by the source (from memory); ratio: same"),
    Fluid("methane", "Methane", WIDE, MEGA, "Quinones-Cisneros & Deiters, J. Phys. Chem. B 110 (2006) 12820",
          "Setzmann & Wagner, J. Phys. Chem. Ref. Data 20 (1991) 1061", 0.003, 0.003,
          ABSOLUTE + UNKNOWN_SHAPE + ", and it is 1.1 % above the value from memory; the viscosity carries the ratio's "
          "uncertainty",
          11.0631e-6),
    Fluid("propane", "Propane", (-5.0, 120.0), (1e3, 3.2e5),
          "Vogel et al., J. Phys. Chem. Ref. Data 27 (1998) 947",
          "Lemmon, McLinden, Wagner, J. Chem. Eng. Data 54 (2009) 3141", 0.003, 0.003,
          ABSOLUTE + UNKNOWN_SHAPE + "; the viscosity carries the ratio's uncertainty", 8.1399e-6),
    Fluid("sulfur-hexafluoride", "SulfurHexafluoride", (-5.0, 120.0), (1e3, 3.2e5),
          "Quinones-Cisneros, Huber, Deiters, J. Phys. Chem. Ref. Data 41 (2012) 023102",
          "Guder & Wagner, J. Phys. Chem. Ref. Data 38 (2009) 33", 0.003, 0.003,
          ABSOLUTE + UNKNOWN_SHAPE + "; the viscosity carries the ratio's uncertainty", 15.2369e-6),
    Fluid("neon", "Neon", WIDE, MEGA,
          "Huber, NISTIR 8209 (2018), dilute gas; Vogel et al. 1998, initial density (no printed gas value checks it)",
          "Thol et al. (2019), submitted when the library took it over", 0.003, 0.003,
          ABSOLUTE + "ratio: two published formulations differ by 0.14 % at 233 K and 0.31 % at 423 K; the viscosity "
          "carries the ratio's uncertainty", 31.7088e-6),
    Fluid("krypton", "Krypton", WIDE, MEGA, "Polychroniadou et al., Int. J. Thermophys. 43 (2022) 6",
          "Lemmon & Span, J. Chem. Eng. Data 51 (2006) 785", 0.001, 0.0005,
          ABSOLUTE + "ratio: ab initio and measured ratios (Xiao et al. 2020, judgement)", 25.3062e-6, True),
    Fluid("xenon", "Xenon", WIDE, (1e3, 5e5),
          "Velliadou et al., Int. J. Thermophys. 42 (2021) 74, without its residual term",
          "Lemmon & Span, J. Chem. Eng. Data 51 (2006) 785", 0.003, 0.001,
          "viscosity: dilute gas 0.11 % (May, Berg, Moldover 2007), widened by judgement for the pressure dependence, "
          "whose published residual term (0.7 % at 100 kPa) is left out as unphysical at low density; ratio: judgement",
          23.0183e-6, True),
    Fluid("water", "Water", (0.1, 95.0), (9e4, 2.5e6),
          "IAPWS R12-08: Huber et al., J. Phys. Chem. Ref. Data 38 (2009) 101",
          "IAPWS-95: Wagner & Pruss, J. Phys. Chem. Ref. Data 31 (2002) 387", 0.0017, 0.001,
          "viscosity: 0.17 % at 20 C (from memory), 1 % stated over the whole liquid; ratio: 0.05 % for 0-40 C "
          "(Kestin, "
          "Sokolov, Wakeham 1978), doubled by judgement up to 95 C", phase="liquid"),
]
