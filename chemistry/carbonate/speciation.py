"""Every species of a water, and its saturation with calcium carbonate."""

from dataclasses import dataclass

from chemistry import activity as activities
from chemistry.carbonate import equilibrium, waters
from chemistry.constants import Values


@dataclass(frozen=True, slots=True)
class Speciation:
    """A water at equilibrium. Concentrations in mmol/L (meq/L for alkalinity), activity coefficients without
    unit.

    si_* are saturation indices log10(ion activity product / solubility product); log_pco2 is log10 of the
    pressure of CO2 in atm with which the water would be in balance.
    """

    temperature_c: Values
    ph: Values
    ionic_strength_mol_l: Values
    alkalinity_meq_l: Values
    dic_mmol_l: Values
    co2_mmol_l: Values
    hco3_mmol_l: Values
    co3_mmol_l: Values
    hydroxide_mmol_l: Values
    free_calcium_mmol_l: Values
    cahco3_mmol_l: Values
    caco3_aq_mmol_l: Values
    caso4_mmol_l: Values
    free_magnesium_mmol_l: Values
    mghco3_mmol_l: Values
    mgco3_mmol_l: Values
    mgso4_mmol_l: Values
    nahco3_mmol_l: Values
    naco3_mmol_l: Values
    free_sulfate_mmol_l: Values
    hypochlorite_mmol_l: Values
    gamma_h: Values
    gamma_calcium: Values
    gamma_hco3: Values
    gamma_co3: Values
    gamma_co2: Values
    si_calcite: Values
    si_aragonite: Values
    si_brucite: Values
    log_pco2: Values
    solved: Values  # equilibrium.Solved, in mol/L

    @property
    def alkalinity_mg_l_caco3(self) -> Values:
        """Total alkalinity, mg/L as CaCO3."""
        return self.alkalinity_meq_l * waters.CACO3_MG_MEQ


def speciate(water: waters.Water, *, activity: str = activities.DAVIES) -> Speciation:
    """The :class:`Speciation` of a :class:`waters.Water`.

    activity: "davies" or "phreeqc". Ranges and errors as for Water; an alkalinity too low for its pH raises
    ChemistryError, an ionic strength above 0.5 mol/L or a pH outside 3 to 13 raises OutOfRange.
    Source: see constants_of_equilibrium (keys PLUMMER-BUSENBERG-1982, PHREEQC-DAT) and equilibrium.
    """
    totals = waters.totals(water)
    return of_solved(totals.temperature_c, equilibrium.solve(totals, activity))


def of_solved(temperature_c: Values, found: Values) -> Speciation:
    """Dress an equilibrium.Solved as a :class:`Speciation`."""
    log10 = equilibrium.log10
    kelvin = temperature_c + 273.15
    si_calcite = log10(found.ion_product_calcite)
    si_brucite = log10(found.ion_product_brucite)
    gamma_h, gamma_ca, gamma_hco3, gamma_co3, gamma_co2 = found.gammas
    # log Ksp of calcite less that of aragonite: the two fits differ in their first and third coefficients
    # only
    over_aragonite = -171.9065 + 171.9773 + (2839.319 - 2903.293) / kelvin
    return Speciation(
        temperature_c=temperature_c,
        ph=-log10(found.h),
        ionic_strength_mol_l=found.ionic_strength,
        alkalinity_meq_l=found.alkalinity * 1e3,
        dic_mmol_l=found.carbon * 1e3,
        co2_mmol_l=found.co2 * 1e3,
        hco3_mmol_l=found.hco3 * 1e3,
        co3_mmol_l=found.co3 * 1e3,
        hydroxide_mmol_l=found.hydroxide * 1e3,
        free_calcium_mmol_l=found.ca * 1e3,
        cahco3_mmol_l=found.cahco3 * 1e3,
        caco3_aq_mmol_l=found.caco3 * 1e3,
        caso4_mmol_l=found.caso4 * 1e3,
        free_magnesium_mmol_l=found.mg * 1e3,
        mghco3_mmol_l=found.mghco3 * 1e3,
        mgco3_mmol_l=found.mgco3 * 1e3,
        mgso4_mmol_l=found.mgso4 * 1e3,
        nahco3_mmol_l=found.nahco3 * 1e3,
        naco3_mmol_l=found.naco3 * 1e3,
        free_sulfate_mmol_l=found.so4 * 1e3,
        hypochlorite_mmol_l=found.hypochlorite * 1e3,
        gamma_h=gamma_h,
        gamma_calcium=gamma_ca,
        gamma_hco3=gamma_hco3,
        gamma_co3=gamma_co3,
        gamma_co2=gamma_co2,
        si_calcite=si_calcite,
        si_aragonite=si_calcite + over_aragonite,
        si_brucite=si_brucite,
        log_pco2=log10(found.pco2),
        solved=found,
    )
