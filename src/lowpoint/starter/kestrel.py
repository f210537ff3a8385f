"""Kestrel Bay, an island utility: its control valves in liquid service, metric. All of it is invented demo data.

Flow m3/h, pressures bar gauge (thermal desalination: absolute), temperature deg C, sizes mm, coefficient Kv.
"""

from __future__ import annotations

from lowpoint.starter import trims
from lowpoint.starter.kestrel_readings import HILL_TOP
from lowpoint.starter.plant import Area, Item, Plant, Table, maximum, minimum, normal, start_up

__all__ = ["PLANT"]

SEA = Area("sea-water intake", 4.0)
OSMOSIS = Area("reverse osmosis", 9.0)
THERMAL = Area("thermal desalination", 11.0)
BOILERS = Area("boiler house", 16.0)
HEATING = Area("district heating", 145.0)
JETTY = Area("fuel jetty", 6.0)
AMMONIA = Area("ammonia plant", 18.0)
AREAS = (SEA, OSMOSIS, THERMAL, BOILERS, HEATING, JETTY, AMMONIA)

INTAKE_600 = Table("Intake_600", (
    (10, 320, 0.88, 2.9), (20, 850, 0.87, 3.0), (30, 1700, 0.86, 3.1), (40, 2900, 0.84, 3.2), (50, 4500, 0.81, 3.3),
    (60, 6600, 0.78, 3.4), (70, 9100, 0.74, 3.6), (80, 11600, 0.70, 3.9), (90, 13500, 0.66, 4.2),
    (100, 14600, 0.62, 4.5),
))  # fmt: skip
RETURN_200 = Table("Return_200", (
    (10, 18, 0.93, 2.2), (20, 55, 0.92, 2.3), (30, 120, 0.90, 2.4), (40, 215, 0.88, 2.5), (50, 350, 0.85, 2.7),
    (60, 540, 0.81, 2.9), (70, 800, 0.76, 3.1), (80, 1150, 0.70, 3.4), (90, 1500, 0.65, 3.8), (100, 1750, 0.60, 4.2),
))  # fmt: skip
STORE_150 = Table("Store_150", (
    (10, 26, 0.91, 2.1), (20, 62, 0.90, 2.1), (30, 105, 0.90, 2.2), (40, 152, 0.89, 2.2), (50, 202, 0.88, 2.3),
    (60, 255, 0.87, 2.3), (70, 310, 0.86, 2.4), (80, 364, 0.86, 2.4), (90, 412, 0.85, 2.5), (100, 450, 0.85, 2.5),
))  # fmt: skip

SALT = 36.5
"""Salinity of the bay, g/kg."""

INTAKE_ITEMS = (
    Item("21-FCV-101", SEA, "intake pump A discharge", "sea water", trims.BUTTERFLY, (600, 600, 600), 14600, "damage",
         (minimum(2200, 3.9, 2.9, 17), normal(3100, 3.4, 2.8, 21), maximum(4000, 2.9, 2.6, 29)), SALT,
         table=INTAKE_600),
    Item("21-FCV-102", SEA, "intake pump B discharge", "sea water", trims.BUTTERFLY, (600, 600, 600), 14600, "damage",
         (start_up(1500, 4.3, 1.2, 17), normal(3100, 3.4, 2.8, 21), maximum(4000, 2.9, 2.6, 29)), SALT,
         table=INTAKE_600),
    Item("21-FCV-103", SEA, "intake pump C discharge", "sea water", trims.BUTTERFLY, (600, 600, 600), 14600, "damage",
         (minimum(2100, 4.0, 2.9, 17), normal(3050, 3.4, 2.8, 21).wrong("p1 and p2 are swapped", p1_given=2.8,
                                                                        p2_given=3.4),
          maximum(3950, 2.9, 2.6, 29)), SALT, table=INTAKE_600),
    Item("21-PCV-105", SEA, "intake header relief to outfall", "sea water", trims.OFFSET_DISC, (400, 400, 400), 6400,
         "damage", (minimum(500, 3.0, 0.4, 17).at(0.82), normal(900, 3.3, 0.4, 21).at(0.80),
                    maximum(1800, 3.6, 0.5, 29).at(0.76)), SALT),
    Item("21-FCV-110", SEA, "screen wash water", "sea water", trims.CONTOURED, (80, 82.5, 82.5), 98, "constant",
         (minimum(28, 5.1, 3.4, 17), normal(46, 4.8, 3.2, 21), maximum(60, 4.5, 3.1, 29)), SALT),
    Item("21-FCV-112", SEA, "debris filter backwash", "sea water", trims.BUTTERFLY, (250, 260.4, 260.4), 2100,
         "damage", (minimum(260, 3.1, 1.9, 17).at(0.80), normal(420, 2.9, 1.8, 21).at(0.79),
                    maximum(560, 2.7, 1.7, 29).at(0.77)), SALT),
    Item("21-PCV-118", SEA, "pump minimum-flow recirculation", "sea water", trims.HOLED_CAGE, (200, 206.5, 206.5),
         420, "damage", (start_up(620, 4.6, 0.6, 17), normal(480, 3.9, 0.6, 21), maximum(590, 4.3, 0.6, 29)), SALT),
    Item("21-FCV-121", SEA, "electrochlorinator feed", "sea water", trims.CONTOURED, (40, 54.5, 54.5), 24, "constant",
         (minimum(6, 4.6, 2.9, 17), normal(11, 4.4, 2.8, 21).wrong("flow typed as text", flow="11,0"),
          maximum(15, 4.1, 2.7, 29)), SALT),
    Item("21-LCV-126", SEA, "seal pit level", "sea water", trims.BUTTERFLY, (500, 500, 500), 9800, "incipient",
         (minimum(1900, 0.9, 0.55, 23), normal(2800, 0.8, 0.5, 27), maximum(3500, 0.7, 0.42, 34)), SALT),
    Item("21-TCV-133", SEA, "condenser return temperature", "sea water", trims.BALL, (200, 206.5, 206.5), 1750,
         "damage", (minimum(310, 2.4, 1.1, 24), normal(520, 2.2, 1.2, 28), maximum(760, 2.0, 1.3, 36)), SALT,
         table=RETURN_200),
)  # fmt: skip

OSMOSIS_ITEMS = (
    Item("22-FCV-201", OSMOSIS, "high-pressure pump feed", "sea water", trims.CAGE, (200, 206.5, 206.5), 620,
         "constant", (minimum(290, 5.6, 3.4, 18), normal(410, 5.3, 3.6, 22), maximum(500, 5.0, 3.7, 30)), SALT),
    Item("22-FCV-204", OSMOSIS, "brine reject, train A", "brine", trims.THREE_STAGES, (80, 107.1, 107.1), 40,
         "damage", (minimum(120, 54, 3.5, 18), normal(170, 57, 4.2, 22), maximum(205, 60, 5.0, 30)), 66.0),
    Item("22-FCV-205", OSMOSIS, "brine reject, train B", "brine", trims.THREE_STAGES, (80, 107.1, 107.1), 40,
         "damage", (start_up(70, 42, 0.8, 18), normal(170, 57, 4.2, 22), maximum(205, 60, 5.0, 30)), 66.0),
    Item("22-PCV-209", OSMOSIS, "energy recovery bypass", "brine", trims.FOUR_STAGES, (50, 70.3, 70.3), 16, "damage",
         (start_up(38, 46, 2.2, 18), normal(52, 57, 4.2, 22), maximum(66, 61, 5.1, 30)), 66.0),
    Item("22-FCV-212", OSMOSIS, "permeate to storage", "permeate", trims.CONTOURED, (150, 159.3, 159.3), 360,
         "incipient", (minimum(120, 2.6, 1.9, 19), normal(180, 2.4, 1.7, 23), maximum(225, 2.2, 1.6, 31))),
    Item("22-FCV-215", OSMOSIS, "membrane flushing", "demineralised water", trims.CONTOURED, (100, 107.1, 107.1), 160,
         "constant", (minimum(48, 4.4, 2.7, 19), normal(75, 4.2, 2.6, 23),
                      maximum(98, 4.0, 2.6, 31).wrong("relative density typed as density", density_given=0.997))),
    Item("22-LCV-220", OSMOSIS, "permeate tank level", "permeate", trims.DOUBLE_PORT, (150, 159.3, 159.3), 330,
         "constant", (minimum(110, 3.1, 1.4, 19), normal(170, 2.9, 1.3, 23), maximum(215, 2.7, 1.3, 31))),
    Item("22-FCV-224", OSMOSIS, "second-pass feed", "permeate", trims.HOLED_CAGE, (100, 107.1, 107.1), 110,
         "constant", (minimum(90, 13.4, 9.2, 19), normal(135, 13.1, 9.6, 23), maximum(165, 12.8, 9.9, 31))),
    Item("22-FCV-228", OSMOSIS, "second-pass concentrate recycle", "permeate", trims.TWO_STAGES, (50, 54.5, 54.5), 22,
         "damage", (minimum(24, 9.1, 2.1, 19), normal(36, 9.4, 2.2, 23),
                    maximum(46, 9.8, 2.3, 31).wrong("FL is missing", fl=None))),
    Item("22-PCV-231", OSMOSIS, "pump minimum-flow recirculation", "sea water", trims.FOUR_STAGES, (65, 82.5, 82.5),
         22, "damage", (start_up(86, 63, 1.4, 18), normal(70, 61, 3.2, 22), maximum(84, 62, 3.4, 30)), SALT),
)  # fmt: skip

THERMAL_ITEMS = (
    Item("23-FCV-301", THERMAL, "evaporator feed", "sea water", trims.CAGE, (150, 159.3, 159.3), 340, "constant",
         (minimum(170, 4.4, 3.1, 26), normal(240, 4.2, 3.1, 30), maximum(290, 4.0, 3.1, 38)), SALT, unit="bar a"),
    Item("23-LCV-304", THERMAL, "brine blowdown level", "brine", trims.CONTOURED, (150, 159.3, 159.3), 360,
         "constant", (minimum(90, 2.6, 1.4, 40), normal(140, 2.5, 1.5, 42), maximum(180, 2.4, 1.5, 46)), 70.0,
         unit="bar a"),
    Item("23-LCV-307", THERMAL, "distillate extraction level", "distillate", trims.CONTOURED, (100, 107.1, 107.1),
         160, "incipient", (minimum(45, 4.3, 2.9, 38), normal(78, 4.1, 2.8, 40), maximum(100, 3.9, 2.8, 44)),
         unit="bar a"),
    Item("23-FCV-310", THERMAL, "hot brine recirculation", "brine", trims.ECCENTRIC_PLUG, (200, 206.5, 206.5), 820,
         "damage", (minimum(260, 2.9, 1.7, 88), normal(380, 2.8, 1.8, 90), maximum(470, 2.7, 1.8, 92)), 60.0,
         unit="bar a"),
    Item("23-TCV-313", THERMAL, "desuperheater spray", "condensate", trims.NEEDLE, (25, 28.5, 28.5), 4.0, "constant",
         (minimum(1.1, 14.2, 9.0, 68), normal(2.6, 13.8, 8.6, 72), maximum(4.2, 13.2, 8.3, 78)), unit="bar a"),
    Item("23-LCV-316", THERMAL, "brine heater condensate", "steam condensate", trims.HOLED_CAGE, (80, 82.5, 82.5), 62,
         "damage", (minimum(22, 4.6, 2.4, 107), normal(36, 4.5, 2.5, 110), maximum(45, 4.4, 2.6, 112)), unit="bar a"),
    Item("23-FCV-323", THERMAL, "inter-stage brine transfer", "brine", trims.OFFSET_DISC, (300, 309.7, 309.7), 3300,
         "damage", (minimum(420, 0.92, 0.52, 60).at(0.78), normal(640, 0.90, 0.55, 62).at(0.76),
                    maximum(820, 0.88, 0.58, 64).at(0.74)), 68.0, unit="bar a"),
    Item("23-FCV-326", THERMAL, "distillate to remineralisation", "distillate", trims.CONTOURED, (100, 107.1, 107.1),
         160, "constant", (minimum(52, 5.0, 3.4, 38), normal(80, 4.8, 3.3, 40).wrong("temperature is blank", t=None),
                           maximum(104, 4.6, 3.2, 44)), unit="bar a"),
    Item("23-PCV-329", THERMAL, "ejector condenser drain", "condensate", trims.CONTOURED, (50, 54.5, 54.5), 40,
         "damage", (minimum(9, 1.9, 0.9, 48), normal(15, 1.8, 0.8, 52),
                    maximum(20, 1.8, 0.0, 56).wrong("gauge pressure left where absolute is stated")), unit="bar a"),
)  # fmt: skip

BOILER_ITEMS = (
    Item("24-FCV-401", BOILERS, "feed water, boiler 1", "boiler feed water", trims.CAGE, (80, 107.1, 107.1), 55,
         "constant", (minimum(28, 74, 63, 126), normal(62, 71, 60, 130), maximum(88, 68, 59, 134))),
    Item("24-FCV-402", BOILERS, "feed water, boiler 2", "boiler feed water", trims.CAGE, (80, 107.1, 107.1), 55,
         "constant", (start_up(4, 78, 2.5, 110).wrong("the main valve is too large for start-up"),
                      normal(62, 71, 60, 130), maximum(88, 68, 59, 134))),
    Item("24-FCV-405", BOILERS, "feed pump minimum flow, pump A", "boiler feed water", trims.FOUR_STAGES,
         (40, 54.5, 54.5), 8.0, "damage",
         (minimum(26, 76, 6.4, 124), normal(28, 78, 6.6, 126), maximum(30, 80, 6.9, 130))),
    Item("24-FCV-406", BOILERS, "feed pump minimum flow, pump B", "boiler feed water", trims.FOUR_STAGES,
         (40, 54.5, 54.5), 8.0, "damage",
         (start_up(26, 76, 1.6, 110), normal(28, 78, 6.6, 126), maximum(30, 80, 6.9, 130))),
    Item("24-LCV-408", BOILERS, "deaerator level", "condensate", trims.CAGE, (100, 107.1, 107.1), 165, "constant",
         (minimum(40, 9.4, 4.6, 80), normal(85, 9.0, 4.4, 185).wrong("185 deg F typed in deg C"),
          maximum(120, 8.6, 4.3, 90))),
    Item("24-FCV-414", BOILERS, "attemperator spray", "feed water", trims.TWO_STAGES, (25, 28.5, 28.5), 5.0,
         "constant", (minimum(2.2, 82, 62, 126), normal(6.0, 80, 61, 130), maximum(10.5, 78, 60, 134))),
    Item("24-LCV-417", BOILERS, "process condensate to flash vessel", "steam condensate", trims.CONTOURED,
         (80, 107.1, 107.1), 98, "damage",
         (minimum(11, 6.4, 1.5, 150), normal(20, 6.2, 1.5, 152).noting("flashing is no mistake: p2 is below pv"),
          maximum(28, 6.0, 1.5, 154))),
    Item("24-FCV-420", BOILERS, "continuous blowdown", "water", trims.VENTURI_ANGLE, (50, 54.5, 82.5), 30, "choked",
         (minimum(2.4, 41.5, 4.0, 250), normal(4.5, 41.2, 4.0, 250).noting("flashing by design"),
          maximum(7.5, 41.0, 4.0, 250))),
    Item("24-LCV-423", BOILERS, "heater drain", "steam condensate", trims.HOLED_CAGE, (50, 54.5, 54.5), 25, "damage",
         (minimum(9, 14.8, 10.9, 176), normal(16, 14.5, 10.8, 178), maximum(22, 14.1, 10.7, 180))),
    Item("24-PCV-426", BOILERS, "demineralised make-up", "demineralised water", trims.CONTOURED, (80, 82.5, 82.5), 98,
         "constant", (minimum(24, 6.3, 3.9, 18), normal(48, 6.0, 3.6, 22),
                      maximum(66, 5.6, 3.3, 26))),
    Item("24-FCV-429", BOILERS, "condensate polishing", "condensate", trims.CONTOURED, (150, 159.3, 159.3), 360,
         "constant", (minimum(140, 14.6, 12.1, 42), normal(230, 14.2, 11.6, 45), maximum(310, 13.6, 11.0, 48))),
    Item("24-LCV-432", BOILERS, "hotwell level", "condensate", trims.UNTESTED, (150, 159.3, 159.3), 330, "choked",
         (minimum(110, 13.0, 7.2, 42),
          normal(190, 12.6, 7.6, 45).noting("no limit was ever tested: only choking can be judged"),
          maximum(260, 12.0, 7.9, 48))),
    Item("24-TCV-435", BOILERS, "sample and gland cooling", "town water", trims.CONTOURED, (25, 28.5, 28.5), 11,
         "incipient", (minimum(1.6, 5.2, 3.2, 16), normal(3.4, 5.0, 3.0, 20), maximum(6.0, 4.8, 2.9, 26)),
         estimate=True),
)  # fmt: skip

HEATING_ITEMS = (
    Item("25-FCV-501", HEATING, "supply to the town main", "district heating water", trims.ECCENTRIC_PLUG,
         (250, 260.4, 260.4), 1300, "incipient",
         (minimum(420, 12.2, 10.8, 95), normal(760, 11.8, 10.6, 108), maximum(980, 11.4, 10.2, 120))),
    Item("25-PCV-504", HEATING, "hill-top pressure holding", "district heating water", trims.HOLED_CAGE,
         (150, 159.3, 159.3), 230, "damage",
         (minimum(160, 7.4, 2.6, 88), normal(240, 7.0, 2.8, 95), maximum(310, 6.6, 2.9, 105))),
    Item("25-TCV-507", HEATING, "mixing shunt", "district heating water", trims.BALL, (150, 159.3, 159.3), 1000,
         "damage", (minimum(130, 6.4, 4.9, 70).at(0.90), normal(240, 6.2, 4.9, 80).at(0.88),
                    maximum(330, 6.0, 4.9, 90).at(0.85))),
    Item("25-PCV-510", HEATING, "substation differential pressure", "district heating water", trims.CAGE,
         (65, 82.5, 82.5), 62, "constant",
         (minimum(16, 8.9, 4.6, 95), normal(32, 8.4, 4.7, 108), maximum(44, 7.9, 4.8, 120))),
    Item("25-PCV-513", HEATING, "return pressure holding", "district heating water", trims.ECCENTRIC_PLUG,
         (200, 206.5, 206.5), 820, "damage",
         (minimum(360, 7.2, 3.1, 52).at(0.90), normal(560, 6.8, 3.3, 56).at(0.88), maximum(720, 6.4, 3.4, 60))),
    Item("25-FCV-516", HEATING, "thermal store charging", "hot water", trims.ECCENTRIC_PLUG, (150, 159.3, 159.3), 450,
         "damage", (minimum(130, 4.9, 3.4, 92), normal(230, 4.7, 3.4, 95), maximum(300, 4.5, 3.4, 98)),
         table=STORE_150),
    Item("25-FCV-519", HEATING, "thermal store discharging", "hot water", trims.ECCENTRIC_PLUG, (150, 159.3, 159.3),
         450, "damage", (minimum(130, 4.2, 1.6, 92), normal(230, 4.0, 1.9, 95),
                         maximum(700, 3.9, 3.2, 98).wrong("the valve is too small for this flow")),
         table=STORE_150),
    Item("25-PCV-522", HEATING, "softened make-up", "town water", trims.CONTOURED, (40, 43.1, 43.1), 24, "incipient",
         (minimum(4.0, 7.8, 2.9, 12), normal(8.5, 7.4, 2.7, 14), maximum(13, 7.0, 2.6, 18)), estimate=True),
    Item("25-FCV-525", HEATING, "heat exchanger primary", "district heating water", trims.CONTOURED,
         (100, 159.3, 159.3), 160, "constant",
         (minimum(50, 9.4, 6.9, 105), normal(110, 9.0, 7.0, 112),
          maximum(1150, 8.6, 7.2, 120).wrong("ten times the flow: more than the reducers pass"))),
    Item("25-FCV-528", HEATING, "solar field glycol circuit", "glycol water", trims.CONTOURED, (80, 82.5, 82.5), 98,
         "incipient", (minimum(20, 5.1, 3.6, 60).wrong("a mixture without its own vapour pressure"),
                      normal(42, 4.9, 3.5, 75).noting("the supplier's pv, pc and density are given", pv_given=0.33,
                                                      pc_given=190.0, density_given=1008.0),
                      maximum(55, 4.7, 3.4, 88).noting("the supplier's pv, pc and density are given", pv_given=0.56,
                                                       pc_given=190.0, density_given=998.0)), estimate=True),
)  # fmt: skip

JETTY_ITEMS = (
    Item("26-FCV-601", JETTY, "propane unloading", "propane", trims.CAGE, (150, 159.3, 159.3), 370, "constant",
         (minimum(110, 13.8, 11.2, 8), normal(220, 13.2, 10.9, 14), maximum(290, 12.8, 11.0, 20))),
    Item("26-PCV-604", JETTY, "propane pump spill-back", "propane", trims.HOLED_CAGE, (50, 54.5, 54.5), 25, "damage",
         (start_up(42, 19.2, 7.0, 12), normal(38, 18.4, 11.6, 14), maximum(42, 18.8, 12.0, 20))),
    Item("26-FCV-607", JETTY, "propane to vaporiser", "propane", trims.CONTOURED, (40, 43.1, 43.1), 24, "damage",
         (minimum(4.5, 15.2, 11.8, 12), normal(12, 14.8, 11.4, 16), maximum(19, 14.2, 11.2, 24))),
    Item("26-FCV-610", JETTY, "naphtha-like solvent loading", "n-hexane", trims.BALL, (150, 159.3, 159.3), 1000,
         "damage", (minimum(160, 5.2, 3.4, 12).at(0.90), normal(290, 4.9, 3.4, 20).at(0.88),
                    maximum(400, 4.6, 3.4, 30).at(0.86))),
    Item("26-PCV-613", JETTY, "solvent pump recycle", "n-hexane", trims.DOUBLE_PORT, (80, 82.5, 82.5), 95, "damage",
         (minimum(55, 7.6, 1.4, 12), normal(60, 7.9, 1.5, 18), maximum(64, 8.2, 1.6, 30))),
    Item("26-FCV-616", JETTY, "methanol to engines", "methanol", trims.CONTOURED, (40, 43.1, 43.1), 24, "incipient",
         (minimum(3.6, 9.6, 6.8, 14), normal(9.5, 9.2, 6.6, 20), maximum(15, 8.8, 6.4, 34)), estimate=True),
    Item("26-FCV-619", JETTY, "methanol unloading", "metanole", trims.BALL, (150, 159.3, 159.3), 1000, "damage",
         (minimum(140, 4.6, 3.1, 12).wrong("the liquid's name is misspelled"),
          normal(260, 4.4, 3.1, 18).wrong("the liquid's name is misspelled"),
          maximum(360, 4.2, 3.1, 30).wrong("the liquid's name is misspelled"))),
    Item("26-PCV-622", JETTY, "methanol pump recycle", "methanol", trims.CONTOURED, (50, 54.5, 54.5), 42, "damage",
         (minimum(22, 8.4, 2.2, 14), normal(24, 8.6, 2.3, 22),
          maximum(25, 8.8, 2.4, 34).wrong("limits in the downstream form", incipient_ref=1.10, constant_ref=0.65,
                                          damage_ref=0.42))),
)  # fmt: skip

AMMONIA_ITEMS = (
    Item("27-LCV-701", AMMONIA, "receiver to low-pressure vessel", "ammonia", trims.CONTOURED, (40, 43.1, 54.5), 24,
         "damage", (minimum(2.2, 11.6, 2.1, 28), normal(4.6, 13.2, 2.2, 33).noting("flashing by design"),
                    maximum(6.8, 14.6, 2.4, 37))),
    Item("27-FCV-704", AMMONIA, "pumped feed to evaporators", "liquid ammonia", trims.CONTOURED, (40, 43.1, 43.1), 24,
         "damage", (minimum(5.0, 5.3, 3.4, -12), normal(9.5, 5.0, 3.4, -10), maximum(14, 4.7, 3.3, -8))),
    Item("27-FCV-707", AMMONIA, "feed to flue-gas cleaning", "ammonia", trims.NEEDLE, (25, 28.5, 28.5), 2.5,
         "constant", (minimum(0.4, 16.4, 13.2, 14), normal(1.3, 16.0, 12.9, 20), maximum(2.6, 15.4, 12.6, 26))),
    Item("27-PCV-710", AMMONIA, "feed pump spill-back", "ammonia", trims.HOLED_CAGE, (25, 28.5, 28.5), 6.0, "damage",
         (start_up(7.0, 17.4, 9.0, 16), normal(6.0, 16.8, 11.0, 18), maximum(7.4, 17.2, 11.6, 26))),
    Item("27-FCV-713", AMMONIA, "tanker unloading", "ammonia", trims.CONTOURED, (80, 54.5, 54.5), 98, "damage",
         (minimum(14, 13.6, 11.4, 14).wrong("valve size and pipe bore are swapped"),
          normal(30, 13.2, 11.2, 18).wrong("valve size and pipe bore are swapped"),
          maximum(42, 12.8, 11.0, 24).wrong("valve size and pipe bore are swapped"))),
)  # fmt: skip

PLANT = Plant(
    "Kestrel Bay", "metric", AREAS, (INTAKE_600, RETURN_200, STORE_150),
    INTAKE_ITEMS + OSMOSIS_ITEMS + THERMAL_ITEMS + BOILER_ITEMS + HEATING_ITEMS + JETTY_ITEMS + AMMONIA_ITEMS,
    HILL_TOP,
)  # fmt: skip
