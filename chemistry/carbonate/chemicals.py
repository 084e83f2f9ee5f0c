"""What one mole of each dosed chemical does to alkalinity, inorganic carbon and the ions.

Source: stoichiometry (key definition), with CIAAW molar masses. Doses are of the pure compound unless the
entry says otherwise; chlorine and hypochlorite both count as mg/L Cl2.
"""

from dataclasses import dataclass

from chemistry import constants, errors


@dataclass(frozen=True, slots=True)
class Effect:
    """Per mole: equivalents of alkalinity, moles of carbon and of each ion; ``g_mol`` is the mass the dose is
    in."""

    g_mol: float
    alkalinity: float
    carbon: float = 0.0
    calcium: float = 0.0
    magnesium: float = 0.0
    sodium: float = 0.0
    chloride: float = 0.0
    sulfate: float = 0.0
    other_charge: float = 0.0
    free_chlorine: float = 0.0


def _mass(formula: str) -> float:
    return constants.molar_mass(formula)


_CL2 = _mass("Cl2")

EFFECTS: dict[str, Effect] = {
    "Ca(OH)2": Effect(_mass("Ca(OH)2"), 2.0, calcium=1.0),
    "CaO": Effect(_mass("CaO"), 2.0, calcium=1.0),
    "CaCO3": Effect(_mass("CaCO3"), 2.0, carbon=1.0, calcium=1.0),
    "Mg(OH)2": Effect(_mass("Mg(OH)2"), 2.0, magnesium=1.0),
    "NaOH": Effect(_mass("NaOH"), 1.0, sodium=1.0),
    "Na2CO3": Effect(_mass("Na2CO3"), 2.0, carbon=1.0, sodium=2.0),
    "NaHCO3": Effect(_mass("NaHCO3"), 1.0, carbon=1.0, sodium=1.0),
    "CO2": Effect(_mass("CO2"), 0.0, carbon=1.0),
    "H2SO4": Effect(_mass("H2SO4"), -2.0, sulfate=1.0),
    "HCl": Effect(_mass("HCl"), -1.0, chloride=1.0),
    # NaOCl counts as OCl- in the alkalinity; the residual stays. The sodium chloride made with it is left
    # out.
    "NaOCl": Effect(_CL2, 1.0, sodium=1.0, free_chlorine=1.0),
    # Cl2 + H2O = HOCl + HCl; the HOCl stays.
    "Cl2": Effect(_CL2, -1.0, chloride=1.0, free_chlorine=1.0),
    # Once its chlorine is used up: OCl- ends as Cl-, alkalinity as before; HOCl ends as a second HCl.
    "NaOCl, used up": Effect(_CL2, 0.0, sodium=1.0, chloride=1.0),
    "Cl2, used up": Effect(_CL2, -2.0, chloride=2.0),
    # Coagulants with the hydroxide wholly precipitated.
    "Al2(SO4)3.14H2O": Effect(_mass("Al2(SO4)3.14H2O"), -6.0, sulfate=3.0),
    "Al2(SO4)3.18H2O": Effect(_mass("Al2(SO4)3.18H2O"), -6.0, sulfate=3.0),
    "Al2(SO4)3": Effect(_mass("Al2(SO4)3"), -6.0, sulfate=3.0),
    "FeCl3": Effect(_mass("FeCl3"), -3.0, chloride=3.0),
    "Fe2(SO4)3": Effect(_mass("Fe2(SO4)3"), -6.0, sulfate=3.0),
    "FeSO4.7H2O": Effect(_mass("FeSO4.7H2O"), -2.0, sulfate=1.0),
    # Fluoride: hexafluorosilicate hydrolysed wholly to fluoride and silicic acid.
    "H2SiF6": Effect(_mass("H2SiF6"), -6.0, other_charge=6.0),
    "Na2SiF6": Effect(_mass("Na2SiF6"), -4.0, sodium=2.0, other_charge=6.0),
    "NaF": Effect(_mass("NaF"), 0.0, sodium=1.0, other_charge=1.0),
    "CaCl2": Effect(_mass("CaCl2"), 0.0, calcium=1.0, chloride=2.0),
    "CaSO4": Effect(_mass("CaSO4"), 0.0, calcium=1.0, sulfate=1.0),
}


def effect(chemical: str) -> Effect:
    """The :class:`Effect` of a chemical named as in EFFECTS; ChemistryError lists the names otherwise."""
    try:
        return EFFECTS[chemical]
    except KeyError:
        raise errors.ChemistryError(f"no chemical {chemical!r}; known: {', '.join(EFFECTS)}") from None
