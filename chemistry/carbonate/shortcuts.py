"""Carbon dioxide and pH from a field analysis: temperature, pH and alkalinity, the ions unknown."""

from chemistry import activity as activities
from chemistry import constants, errors
from chemistry.carbonate import equilibrium, waters
from chemistry.constants import Values

CO2_G_MOL = constants.molar_mass("CO2")


def co2_mg_l(
    temperature_c: Values, ph: Values, alkalinity_mg_l_caco3: Values, *, ionic_strength_mol_l: Values = None
) -> Values:
    """Free carbon dioxide, mg/L as CO2, from temperature, pH and total alkalinity, without ion pairs.

    temperature_c: 0 to 80 °C; ph: 3 to 13; alkalinity_mg_l_caco3: 0 to 10,000, and high enough for the pH.
    ionic_strength_mol_l: 0 to 0.5; None takes that of calcium bicarbonate of the same alkalinity (1.5 x
    eq/L). The ions of a real water move the result by a few per cent. Outside raises OutOfRange or
    ChemistryError. Source: Plummer and Busenberg 1982 (key PLUMMER-BUSENBERG-1982), Davies activity.
    """
    errors.require("alkalinity", alkalinity_mg_l_caco3, "mg/L CaCO3", 0.0, 10000.0, "limit of this model")
    if ionic_strength_mol_l is None:
        ionic_strength_mol_l = 1.5e-3 / waters.CACO3_MG_MEQ * alkalinity_mg_l_caco3
    errors.require("ionic strength", ionic_strength_mol_l, "mol/L", 0.0, 0.5, "Davies 1962")
    # Inert monovalent ions make up the ionic strength: what bicarbonate itself gives (half its eq/L) is taken
    # off.
    own_mol_l = 0.5e-3 / waters.CACO3_MG_MEQ * alkalinity_mg_l_caco3
    inert_mol_l = 2.0 * (ionic_strength_mol_l - own_mol_l)
    inert_mol_l = inert_mol_l * (inert_mol_l > 0.0)
    water = waters.Water(
        temperature_c=temperature_c,
        ph=ph,
        alkalinity_mg_l_caco3=alkalinity_mg_l_caco3,
        chloride_mg_l=inert_mol_l * (1e3 * constants.molar_mass("Cl")),
    )
    return equilibrium.solve(waters.totals(water), activities.DAVIES).co2 * (1e3 * CO2_G_MOL)


def co2_mg_l_usgs_shortcut(ph: Values, bicarbonate_mg_l: Values) -> Values:
    """Free carbon dioxide, mg/L, by the field formula 1.6 x 10^(6 - pH) x HCO3.

    ph: 6 to 9; bicarbonate_mg_l: 0 to 3,000 mg/L as HCO3-; outside raises OutOfRange. Made for about 25 °C
    and low dissolved solids. Source: USGS TWRI 5-A1 (key USGS-TWRI-5A1); second-hand.
    """
    errors.require("pH", ph, "", 6.0, 9.0, "USGS TWRI 5-A1")
    errors.require("bicarbonate", bicarbonate_mg_l, "mg/L", 0.0, 3000.0, "USGS TWRI 5-A1")
    return 1.6 * 10.0 ** (6.0 - ph) * bicarbonate_mg_l
