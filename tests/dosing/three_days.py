"""Three operating days reckoned by hand, as the files a works would bring in.

Operating day from 07:00, Europe/Berlin. The clocks go forward on 29 March 2026 at 02:00, so 28 March is a day of 23 hours; the
night reading of 29 March was taken an hour late, at 08:00. The caustic tank has a cross-section of 1.000 m2, so 1 mm is 1 L.
"""

WORKS = """
[works]
code = "TRI"
name = "Three Days Water Works"
timezone = "Europe/Berlin"
operating_day_starts = "07:00"
[[shift]]
name = "day"
starts = "07:00"
[[shift]]
name = "night"
starts = "19:00"
[[sample_point]]
code = "OUT"
name = "Outlet"
stage = "entry"
[[meter]]
code = "FT"
name = "Treated water"
unit = "m3"
digits = 5
accuracy_pct = 0.5
[[product]]
code = "NAOH"
name = "Caustic soda 25 %"
chemical = "NaOH"
strength = 25.0
strength_basis = "weight_pct"
density_kg_per_L = 1.273
strength_sd_pct = 1.0
dose_basis = "NaOH"
certified_maximum_mg_per_L = 200.0
[[product]]
code = "PEROX"
name = "Hydrogen peroxide 35 %"
chemical = "H2O2"
strength = 35.0
strength_basis = "weight_pct"
density_kg_per_L = 1.13
strength_sd_pct = 1.0
dose_basis = "H2O2"
[[vessel]]
code = "TANK"
name = "Caustic tank"
product = "NAOH"
role = "bulk"
shape = "vertical_cylinder"
diameter_m = 1.1283792
height_m = 3.0
level_sd_m = 0.005
max_fill_pct = 95
[[vessel]]
code = "DRUM"
name = "Peroxide on a scale"
product = "PEROX"
role = "drum"
shape = "scale"
tare_kg = 60.0
weight_sd_kg = 1.0
[[dosing_point]]
code = "CAUSTIC"
name = "Caustic to outlet pH"
product = "NAOH"
vessels = ["TANK"]
meter = "FT"
sample_point = "OUT"
need = { model = "none" }
[[dosing_point]]
code = "PEROXIDE"
name = "Peroxide"
product = "PEROX"
vessels = ["DRUM"]
meter = "FT"
sample_point = "OUT"
need = { model = "none" }
[[design_dose]]
dosing_point = "CAUSTIC"
dose_mg_per_L = 8.0
effective_from = 2026-03-01T07:00:00
reason = "commissioning"
[[design_dose]]
dosing_point = "PEROXIDE"
dose_mg_per_L = 2.0
effective_from = 2026-03-01T07:00:00
reason = "commissioning"
"""

RECORDS = """site,timestamp,parameter,value,unit,note
FT,2026-03-28T07:00,totaliser,95000,m3,
TANK,2026-03-28T07:00,level,1.500,m,
DRUM,2026-03-28T07:00,weight,960,kg,
FT,2026-03-28T19:00,totaliser,00500,m3,
TANK,2026-03-28T19:00,level,1.360,m,
DRUM,2026-03-28T19:00,weight,930,kg,
FT,2026-03-29T08:00,totaliser,06500,m3,
TANK,2026-03-29T08:00,level,1.216,m,
DRUM,2026-03-29T08:00,weight,894,kg,
FT,2026-03-29T19:00,totaliser,12000,m3,
TANK,2026-03-29T19:00,level,1.076,m,
DRUM,2026-03-29T19:00,weight,864,kg,
FT,2026-03-30T07:00,totaliser,18000,m3,
TANK,2026-03-30T07:00,level,0.924,m,
DRUM,2026-03-30T07:00,weight,829,kg,
FT,2026-03-30T19:00,totaliser,24000,m3,
TANK,2026-03-30T19:00,level,1.774,m,
DRUM,2026-03-30T19:00,weight,,kg,display off
FT,2026-03-31T07:00,totaliser,30000,m3,
TANK,2026-03-31T07:00,level,1.624,m,
DRUM,2026-03-31T07:00,weight,760,kg,
"""

DELIVERIES = """timestamp,vessel,product,quantity,unit,lot,strength,strength_basis,density_kg_per_L,manufactured_on
2026-03-30T10:00,TANK,NAOH,1273,kg,N-1,25.0,weight_pct,1.273,2026-03-29
"""

BY_HAND = {
    # volume ML, litres or kg out of the vessel, product kg, active kg, dose mg/L
    ("2026-03-28", "CAUSTIC"): (11.0, 272.0, 346.256, 86.564, 7.8695),
    ("2026-03-29", "CAUSTIC"): (12.0, 304.0, 386.992, 96.748, 8.0623),
    ("2026-03-30", "CAUSTIC"): (12.0, 300.0, 381.900, 95.475, 7.9563),
    ("2026-03-28", "PEROXIDE"): (11.0, 63.0, 63.0, 22.050, 2.0045),
    ("2026-03-29", "PEROXIDE"): (12.0, 68.0, 68.0, 23.800, 1.9833),
    ("2026-03-30", "PEROXIDE"): (12.0, 69.0, 69.0, 24.150, 2.0125),
}
"""28 March: the boundary of 29 March 07:00 lies 11 h into the 12 h from 19:00 CET to 08:00 CEST, so 11/12 of what passed then
belongs to it: 5,500 + 11/12 × 6,000 m3; 140 + 11/12 × 144 L; 30 + 11/12 × 36 kg. 29 March: 500 + 5,500 + 6,000 m3; 12 + 140 + 152 L;
3 + 30 + 35 kg. 30 March: 12,000 m3; (924 + 1,000 − 1,774) + 150 L, the delivery being 1,273 kg ÷ 1.273 kg/L; 829 − 760 kg."""

SD_BY_HAND = {
    # √(gauge² + strength² + meter²); the boundary has √(1/144 + 121/144) of a reading's 5 L or 1 kg
    ("2026-03-28", "CAUSTIC"): 0.215,
    ("2026-03-29", "CAUSTIC"): 0.202,
    ("2026-03-28", "PEROXIDE"): 0.0487,
    ("2026-03-29", "PEROXIDE"): 0.0454,
    ("2026-03-30", "PEROXIDE"): 0.0470,
}
