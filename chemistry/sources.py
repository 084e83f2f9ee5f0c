"""Where every formula comes from: key -> citation. Functions and steps name the key, screens print the citation.

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
    "CSB-2017": (
        "US Chemical Safety Board, Case Study 2017-01-I-KS (Dec 2017), acid unloaded into hypochlorite; opened in part"
    ),
    "DAVIS-5-14": "Davis, Water and Wastewater Engineering (2010), p. 5-14 and table 5-4; opened in part",
    "EPA-ICS": "US EPA, Incompatible Chemicals Storage, quick reference (P10058CY); one side opened",
    "WI-NR811-51": "Wisconsin Administrative Code NR 811.51, fluoridation; opened",
    "WTPD-11": "ASCE/AWWA, Water Treatment Plant Design, ch. 11, eq. 11.10, 11.18, 11.20; opened",
    "ADAM-GORDON-1999": (
        "Adam & Gordon 1999, Inorganic Chemistry 38:1299, rate law of hypochlorite decomposition; abstract opened"
    ),
    "LISTER-1956": ("Lister 1956, Canadian Journal of Chemistry 34:465, hypochlorite decomposition; abstract opened"),
    "H2O2-MAKERS": (
        "Makers' storage pages for hydrogen peroxide: under 1 % a year if clean; opened. Doubling per 10 °C: from memory"
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
    "AWWA-DECHLORINATION": ("AWWA pipeline disinfection guide, table 7-2, dechlorinating chemicals, field figures; opened"),
    "EPA-815-R-99-014": ("US EPA 815-R-99-014, Alternative Disinfectants and Oxidants; chapter 6 opened, ratios from memory"),
    "LIU-2003": (
        "Liu et al. 2003, Water Research 37:3697: hydrogen peroxide makes DPD read high, "
        "quenching by hypochlorite is hard to hit; abstract opened"
    ),
    "CFR-141.74": "40 CFR 141.74(b), CT tables 1.1 to 3.1; rule text opened, table cells mostly from memory",
    "CFR-141.720": ("40 CFR 141.720, Cryptosporidium CT tables and equations; rule text opened, cells mostly from memory"),
    "CFR-141.172": "40 CFR 141.172(b), disinfection profiling; opened",
    "EPA-816-R-03-004": ("US EPA 816-R-03-004, LT1ESWTR Disinfection Profiling and Benchmarking manual; from memory"),
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
    "KELL-1975": (
        "Kell 1975, J. Chem. Eng. Data 20:97, density of water, eq. 16; second-hand (coefficients agree in four public codes)"
    ),
    "IAPWS-R11-07": (
        "IAPWS R11-07, Release on the Ionization Constant of H2O, after Bandura & Lvov 2006, J. Phys. Chem. "
        "Ref. Data 35:15; abstract opened, coefficients second-hand, CRC table of its values opened"
    ),
    "HARNED-HAMER": "Harned and Hamer form of pKw as used in Standard Methods 2330 B; from memory",
    "BRADLEY-PITZER-1979": (
        "Bradley & Pitzer 1979, J. Phys. Chem. 83:1599, permittivity of water; second-hand (coefficients "
        "agree in four public codes)"
    ),
    "DEBYE-HUCKEL": "Debye-Hückel limiting law, numerical factors; from memory, checked against PHREEQC",
    "DAVIES-1962": "Davies 1962, Ion Association, activity coefficients; from memory",
    "PHREEQC-DAT": (
        "Parkhurst & Appelo, phreeqc.dat as shipped with PHREEQC 3.7 (constants, ion sizes after Truesdell & "
        "Jones 1974); opened"
    ),
    "WATEQ4F-DAT": "Ball & Nordstrom, wateq4f.dat as shipped with PHREEQC (brucite); opened",
    "PLUMMER-BUSENBERG-1982": (
        "Plummer & Busenberg 1982, Geochim. Cosmochim. Acta 46:1011, CO2-H2O-CaCO3 constants; abstract opened"
    ),
    "MORRIS-1966": "Morris 1966, J. Phys. Chem. 70:3798, dissociation of hypochlorous acid; from memory",
    "STUMM-MORGAN": "Stumm & Morgan, Aquatic Chemistry, definitions of alkalinity; from memory",
    "SM-2330": ("Standard Methods 2330 B and C, calcium carbonate saturation; opened in part, formulas from memory"),
    "SM-1030": "Standard Methods 1030 E, checking analyses by ion balance; from memory",
    "RYZNAR-1944": "Ryznar 1944, J. AWWA 36:472, stability index; from memory",
    "LANGELIER-1936": "Langelier 1936, J. AWWA 28:1500, ionic strength from dissolved solids; from memory",
    "RUSSELL-1976": "Russell 1976, ionic strength from conductivity; from memory",
    "TANG-2021": "Tang et al. 2021, Water 13:42, computing the precipitation potential; abstract opened",
    "DIN-38404-10": ("DIN 38404-10, calcite saturation of water, worked example waters C1 to C5; second-hand"),
    "USGS-TWRI-5A1": "USGS TWRI book 5 chapter A1, carbon dioxide from pH and bicarbonate; second-hand",
    "LIME-EXCESS": ("Course notes and a worked example on lime-soda softening, excess lime 1.25 meq/L; opened"),
    "TEN-STATES": (
        "Recommended Standards for Water Works, section 4 (softening, sequestration); second-hand, phosphate "
        "and silica limits from memory"
    ),
    "RESIN-JOURNAL": "Trade journal article on softener chemistry, capacity of 8 % DVB resin; opened",
    "RESIN-FORUM": "Forum post on salt setting and working capacity, low authority; opened",
    "HOLM-EDWARDS-2003": (
        "Holm & Edwards 2003, J. AWWA, Metaphosphate reversion in laboratory and pipe-rig experiments; abstract opened"
    ),
    "ECHA-STPP": ("ECHA registration dossier 15386, hydrolysis of tripolyphosphate at 12 and 25 °C; opened"),
}


def citation(key: str) -> str:
    """The printable citation of a key; KeyError for a key nobody registered."""
    return SOURCES[key]
