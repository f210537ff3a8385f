"""The north shore of Kestrel Bay, built to US customary units: a smaller list. All of it is invented demo data.

Flow US gal/min, pressures psig, temperature deg F, sizes in, coefficient Cv. Pipe bores are those of schedule 40
(common practice).
"""

from __future__ import annotations

from lowpoint.starter import trims
from lowpoint.starter.plant import Area, Item, Plant, Table, maximum, minimum, normal, start_up
from lowpoint.starter.trims import in_us

__all__ = ["PLANT"]

COOLING = Area("cooling water", 20.0)
BOILERS = Area("boiler house", 55.0)
HEATING = Area("district heating", 480.0)
STORAGE = Area("liquid storage", 35.0)

CONTOURED, CAGE, HOLED_CAGE = in_us(trims.CONTOURED), in_us(trims.CAGE), in_us(trims.HOLED_CAGE)
BUTTERFLY, BALL, ECCENTRIC_PLUG = in_us(trims.BUTTERFLY), in_us(trims.BALL), in_us(trims.ECCENTRIC_PLUG)
TWO_STAGES, FOUR_STAGES = in_us(trims.TWO_STAGES), in_us(trims.FOUR_STAGES)

RETURN_8 = Table("Return_8", (
    (10, 22, 0.93, 2.2), (20, 66, 0.92, 2.3), (30, 145, 0.90, 2.4), (40, 255, 0.88, 2.5), (50, 415, 0.85, 2.7),
    (60, 640, 0.81, 2.9), (70, 940, 0.76, 3.1), (80, 1340, 0.70, 3.4), (90, 1740, 0.65, 3.8), (100, 2030, 0.60, 4.2),
))  # fmt: skip

ITEMS = (
    Item("31-FCV-801", COOLING, "sea-water pump discharge", "sea water", BUTTERFLY, (12, 11.94, 11.94), 3900, "damage",
         (minimum(2600, 48, 36, 62), normal(4300, 44, 36, 70), maximum(5900, 40, 35, 84)), 36.5),
    Item("31-TCV-804", COOLING, "condenser return temperature", "sea water", BALL, (8, 7.981, 7.981), 2030, "damage",
         (minimum(1350, 35, 17, 75), normal(2250, 32, 18, 83), maximum(3300, 29, 19, 97)), 36.5, table=RETURN_8),
    Item("31-PCV-807", COOLING, "pump minimum-flow recirculation", "sea water", HOLED_CAGE, (6, 7.981, 7.981), 270,
         "damage", (start_up(1500, 66, 9, 62), normal(1150, 57, 9, 70),
                    maximum(1400, 62, 9, 84).wrong("p1 and p2 are swapped", p1_given=9.0, p2_given=62.0)), 36.5),
    Item("32-FCV-821", BOILERS, "feed water to boiler", "boiler feed water", CAGE, (3, 4.026, 4.026), 64, "constant",
         (minimum(125, 1070, 910, 259), normal(275, 1030, 870, 266), maximum(385, 985, 855, 273))),
    Item("32-FCV-824", BOILERS, "feed pump minimum flow", "boiler feed water", FOUR_STAGES, (1.5, 2.067, 2.067), 9.2,
         "damage", (start_up(115, 1100, 22, 230), normal(123, 1130, 96, 259), maximum(132, 1160, 100, 266))),
    Item("32-LCV-827", BOILERS, "deaerator level", "condensate", CAGE, (4, 4.026, 4.026), 190, "constant",
         (minimum(175, 136, 67, 176), normal(375, 130, 64, 185).wrong("FL is missing", fl=None),
          maximum(530, 125, 62, 194))),
    Item("32-LCV-830", BOILERS, "process condensate to flash vessel", "steam condensate", CONTOURED,
         (3, 4.026, 4.026), 113, "damage",
         (minimum(48, 93, 22, 302), normal(88, 90, 22, 306).noting("flashing is no mistake: p2 is below pv"),
          maximum(123, 87, 22, 309))),
    Item("33-PCV-841", HEATING, "hill-top pressure holding", "district heating water", HOLED_CAGE, (6, 6.065, 6.065),
         265, "damage", (minimum(700, 107, 38, 190), normal(1050, 102, 41, 203), maximum(1360, 96, 42, 221))),
    Item("33-FCV-844", HEATING, "heat exchanger primary", "district heating water", CONTOURED, (4, 6.065, 6.065), 185,
         "constant", (minimum(220, 136, 100, 221), normal(485, 131, 102, 234),
                      maximum(4900, 125, 105, 248).wrong("ten times the flow: more than the reducers pass"))),
    Item("34-FCV-861", STORAGE, "propane unloading", "propane", ECCENTRIC_PLUG, (4, 4.026, 4.026), 245, "damage",
         (minimum(480, 200, 176, 46), normal(970, 191, 172, 57),
          maximum(1270, 186, 172, 68).wrong("relative density typed as density", density_given=0.50))),
    Item("34-PCV-864", STORAGE, "ammonia pump spill-back", "ammonia", TWO_STAGES, (1, 1.049, 1.049), 5.5, "damage",
         (start_up(30, 252, 160, 61), normal(26, 244, 160, 64), maximum(32, 250, 168, 79))),
    Item("34-FCV-867", STORAGE, "methanol to engines", "methanol", CONTOURED, (1.5, 1.610, 1.610), 28, "incipient",
         (minimum(16, 139, 99, 57), normal(42, 133, 96, 72), maximum(66, 128, 93, 93)), estimate=True),
)  # fmt: skip

PLANT = Plant("Kestrel Bay, north shore", "us", (COOLING, BOILERS, HEATING, STORAGE), (RETURN_8,), ITEMS)
