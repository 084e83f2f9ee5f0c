"""Where every formula comes from: key -> citation. Functions and steps name the key, screens print the
citation.

A citation ends with how far it was seen: "opened" (page, abstract or data file read), "second-hand" (read
where another page quotes it), "from memory" (nobody opened it), or "definition".
"""

SOURCES: dict[str, str] = {
    "CIAAW-2021": "CIAAW, Standard Atomic Weights 2021, abridged table; opened",
    "definition": "Follows from the definition or from molar masses alone",
    "common-practice": "Common practice, no source",
    "from-memory": "From memory, no document opened",
    "SM-2320": "Standard Methods 2320 B, alkalinity; from memory",
    "SM-2340": "Standard Methods 2340 B, hardness by calculation; second-hand",
    "DAVIS-2010": "Davis, Water and Wastewater Engineering (2010), chapters 5 to 7; opened in part",
    "WTPD-11": "ASCE/AWWA, Water Treatment Plant Design, ch. 11, eq. 11.10, 11.18, 11.20; opened",
    "ADAM-GORDON-1999": (
        "Adam & Gordon 1999, Inorganic Chemistry 38:1299, rate law of hypochlorite "
        "decomposition; abstract opened"
    ),
    "LISTER-1956": (
        "Lister 1956, Canadian Journal of Chemistry 34:465, hypochlorite decomposition; abstract opened"
    ),
    "H2O2-MAKERS": (
        "Makers' storage pages for hydrogen peroxide: under 1 % a year if clean; opened. "
        "Doubling per 10 °C: from memory"
    ),
    "LALIBERTE-2009": (
        "Laliberté 2009, J. Chem. Eng. Data 54:1725 (and Laliberté & Cooper 2004, 49:1141), "
        "density of solutions; abstract opened, values computed"
    ),
    "SOLVAY-FECL3": "Solvay, ferric chloride solutions, density table 0 to 100 °C, as republished; opened",
    "CRC-DENSITY": "CRC-type table of solution densities at 20 °C, as republished; opened",
    "PERRY-DENSITY": "Perry's handbook, densities of sulfuric and phosphoric acid and caustic; from memory",
    "JONES-TANKS": (
        "D. Jones, Calculating Tank Volume, and Compute Fluid Volumes in Vertical Tanks, "
        "Chemical Processing, "
        "18 Dec 2003; second-hand"
    ),
    "UG-32": (
        "ASME BPVC Section VIII-1, UG-32: torispherical head, crown radius equal to the "
        "diameter, knuckle radius 6 % "
        "of it; from memory. DIN 28011: knuckle 10 %; from memory"
    ),
    "AWWA-DECHLORINATION": (
        "AWWA pipeline disinfection guide, table 7-2, dechlorinating chemicals, field figures; opened"
    ),
    "EPA-815-R-99-014": (
        "US EPA 815-R-99-014, Alternative Disinfectants and Oxidants; chapter 6 opened, ratios from memory"
    ),
    "LIU-2003": (
        "Liu et al. 2003, Water Research 37:3697: hydrogen peroxide makes DPD read high, "
        "quenching by hypochlorite is hard to hit; abstract opened"
    ),
    "CFR-141.74": "40 CFR 141.74(b), CT tables 1.1 to 3.1; rule text opened, table cells mostly from memory",
    "CFR-141.720": (
        "40 CFR 141.720, Cryptosporidium CT tables and equations; rule text opened, cells mostly from memory"
    ),
    "CFR-141.172": "40 CFR 141.172(b), disinfection profiling; opened",
    "EPA-816-R-03-004": (
        "US EPA 816-R-03-004, LT1ESWTR Disinfection Profiling and Benchmarking manual; from memory"
    ),
    "CLARK-1989": "Clark et al. 1989, power formula for Giardia by free chlorine; second-hand",
    "LT2-TOOLBOX": "US EPA, LT2ESWTR Toolbox Guidance Manual, 2010; from memory",
    "LANG-1985": "Lang et al. 1985, sludge equation; second-hand",
    "CORNWELL": "Cornwell, Water Treatment Residuals: iron sludge with bound water; from memory",
    "AWWA-M4": "AWWA Manual M4, Water Fluoridation: fluoride content of the additives; from memory",
    "MADPH-2015": "Massachusetts DPH, daily fluoride report calculation sheet, June 2015; opened",
    "CADPH": "California DPH, Daily Calculation of Chemical Dosages, liquid chemicals; opened",
    "HYPO-TERMS": (
        "Strength terms of hypochlorite: trade % = g/L / 10, weight % = trade % / "
        "density (distributor product "
        "profile; White's Handbook as quoted on an industry page); opened"
    ),
    "ABC-TABLES": "Association of Boards of Certification, formula and conversion tables, 2017; opened",
    "WIS-NR-811.56": "Wisconsin Adm. Code NR 811.56, sequestration; opened",
    "MD0160": "US Army subcourse MD0160, Military Water Supply, lesson 2: dose = demand + residual; opened",
    "GUM": "JCGM 100:2008, Guide to the expression of uncertainty in measurement, eq. 10 and 13; from memory",
    "EPA-WSG-21": "US EPA Water Supply Guidance 21 (April 1981), rounding; second-hand",
}


def citation(key: str) -> str:
    """The printable citation of a key; KeyError for a key nobody registered."""
    return SOURCES[key]
