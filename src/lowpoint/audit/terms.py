"""The quantities of a data sheet: key, kind, role and scope of each, and what the trade calls it.

Labels follow IEC 60534-7 (the standard's data sheet; wording from memory) and common practice of the trade; they are
compared as sets of words after :mod:`lowpoint.audit.words` has folded spelling, abbreviation and language. Symbols are
those of IEC 60534-2-1 and 60534-8-4.
"""

from __future__ import annotations

from dataclasses import dataclass

__all__ = ["OTHERS", "TERMS", "UNCLEAR", "Term"]


@dataclass(frozen=True, eq=False)
class Term:
    """One quantity that a data sheet may give."""

    key: str
    kind: str
    """``pressure``, ``drop`` (a difference of pressures), ``temperature``, ``flow``, ``mass_flow``, ``size``,
    ``density``, ``viscosity``, ``kinematic``, ``coefficient``, ``elevation``, ``velocity``, ``ratio``, ``share`` (per
    cent or ratio), ``level``, ``salinity``, ``count``, ``pressures``, ``sizes`` (several numbers with ; between),
    ``word``, ``text``."""
    role: str
    """``input``, ``claim``, or ``both``: an input that other values of the sheet may contradict."""
    scope: str
    """``item`` or ``case``: what it usually belongs to; one value of a case quantity holds for all cases."""
    meaning: str
    labels: tuple[str, ...]
    symbols: tuple[str, ...] = ()
    inherent: tuple[tuple[str, str], ...] = ()
    """Words of a label that say the unit, with that unit."""


def _term(key: str, kind: str, role: str, scope: str, meaning: str, labels: str, symbols: str = "",
          inherent: tuple[tuple[str, str], ...] = ()) -> Term:  # fmt: skip
    split = tuple(label.strip() for label in labels.split(";") if label.strip())
    return Term(key, kind, role, scope, meaning, split, tuple(symbols.split()), inherent)


_KV_CV = (("kv", "Kv"), ("cv", "Cv"), ("kvs", "Kv"), ("cvs", "Cv"), ("kv100", "Kv"))
_NOMINAL = (("dn", "DN"), ("nps", "NPS"))

TERMS: tuple[Term, ...] = (
    # --- item -------------------------------------------------------------------------------------------------------
    _term("tag", "text", "input", "item", "tag of the item",
          "tag; tag number; item; item number; valve tag; valve number; equipment number; position number; "
          "instrument number; instrument tag; equipment tag; item tag; loop number; loop"),
    _term("service", "text", "input", "item", "what it does",
          "service; duty; function; application; service description; process service"),
    _term("fluid", "text", "input", "item", "liquid",
          "fluid; medium; liquid; process fluid; flowing medium; fluid name; "
          "flow medium; fluid type; line fluid; fluid state"),
    _term("style", "text", "input", "item", "style of the valve",
          "valve style; valve type; body style; body type; body form; type of valve; style; "
          "valve construction; valve body type"),
    _term("direction", "text", "input", "item", "which way the flow acts on the trim",
          "flow direction; flow action; direction of flow; flow tends to; flow over plug"),
    _term("trim", "text", "input", "item", "trim",
          "trim; trim type; trim style; trim class; trim form; trim design; plug type; plug form"),
    _term("characteristic", "word", "input", "item", "inherent characteristic",
          "characteristic; inherent characteristic; flow characteristic; inherent flow characteristic; "
          "trim characteristic; valve characteristic"),
    _term("rangeability", "ratio", "input", "item", "inherent rangeability R",
          "rangeability; inherent rangeability; turndown", "R"),
    # --- site -------------------------------------------------------------------------------------------------------
    _term("elevation", "elevation", "input", "item", "height of the site above sea level",
          "elevation; altitude; site elevation; site altitude; height above sea level; elevation above sea level; "
          "altitude above sea level; plant elevation"),
    _term("atmosphere", "pressure", "input", "item", "barometric pressure of the site, absolute",
          "atmospheric pressure; barometric pressure; ambient pressure; atmosphere; site pressure; site atmosphere; "
          "site atmospheric pressure; site barometric pressure; site ambient pressure; local atmospheric pressure; "
          "local barometric pressure; barometer reading; barometric reading; "
          "barometer", "patm pamb pbar"),
    # --- liquid and flow --------------------------------------------------------------------------------------------
    _term("t", "temperature", "input", "case", "temperature at the inlet",
          "temperature; inlet temperature; flowing temperature; operating temperature; fluid temperature; "
          "process temperature", "T T1 t1"),
    _term("flow", "flow", "input", "case", "volume flow at flowing conditions",
          "flow; flow rate; volume flow; volume flow rate; volumetric flow; volumetric flow rate; "
          "throughput; flow quantity; "
          "actual flow; liquid flow; process flow; required flow; capacity flow", "Q qv"),
    _term("mass_flow", "mass_flow", "input", "case", "mass flow", "mass flow; mass flow rate; mass rate; weight flow",
          "W qm"),
    _term("p1", "pressure", "input", "case", "inlet pressure",
          "inlet pressure; pressure inlet valve; primary pressure; supply pressure inlet", "p1 pin"),
    _term("p2", "pressure", "input", "case", "outlet pressure",
          "outlet pressure; back pressure; secondary pressure; pressure outlet valve", "p2 pout"),
    _term("dp", "drop", "both", "case", "pressure drop p1 - p2",
          "pressure drop; differential pressure; pressure difference; pressure differential; drop; "
          "pressure loss; actual pressure drop; sizing pressure drop; operating pressure drop", "dp"),
    _term("pv", "pressure", "both", "case", "vapour pressure at inlet temperature, absolute",
          "vapour pressure; vapour pressure inlet temperature; fluid vapour pressure; "
          "saturation pressure", "pv psat pvap"),
    _term("pc", "pressure", "both", "item", "thermodynamic critical pressure, absolute",
          "critical pressure; thermodynamic critical pressure", "pc pcrit"),
    _term("density", "density", "both", "case", "density at the inlet, or relative density (unit SG)",
          "density; fluid density; density inlet; specific gravity; relative density; specific weight; mass density; "
          "density flowing conditions; specific gravity flowing", "rho sg gf rho1",
          (("sg", "SG"), ("gf", "SG"), ("gravity", "SG"), ("relative", "SG"))),
    _term("viscosity", "viscosity", "both", "case", "dynamic viscosity",
          "viscosity; dynamic viscosity; absolute viscosity", "mu eta"),
    _term("kinematic", "kinematic", "both", "case", "kinematic viscosity", "kinematic viscosity", "nu"),
    _term("salinity", "salinity", "input", "item", "salt content of sea water", "salinity; salt content"),
    _term("sound_speed", "velocity", "input", "case", "speed of sound in the liquid",
          "speed sound; sound speed; sonic velocity; velocity sound"),
    # --- sizes and factors ------------------------------------------------------------------------------------------
    _term("valve_size", "size", "input", "item", "nominal size d of the valve",
          "valve size; body size; nominal valve size; nominal size; valve body size; body nominal size; size body; "
          "valve dn; body dn; valve nps; body nps; nominal bore; valve nominal bore; "
          "connection size; valve nominal diameter; nominal diameter; end connection size", "d dn nps", _NOMINAL),
    _term("port_size", "size", "input", "item", "diameter of the port or seat, which is no size of the method",
          "port size; seat diameter; port diameter; seat size; trim size; orifice diameter seat"),
    _term("pipe_in", "size", "input", "item", "inside diameter (or nominal size, unit DN or NPS) of the inlet pipe",
          "inlet pipe size; inlet pipe diameter; inlet pipe bore; inlet line size; line size inlet; pipe line size; "
          "pipe size; line size; pipe inside diameter; inlet pipe inside diameter; inlet pipe inside; "
          "inlet pipe bore diameter; pipe bore; pipe diameter; "
          "inlet pipe; pipe; line; pipe line; inlet line; "
          "pipe size schedule; line size schedule; inlet pipe size schedule; "
          "inlet line size schedule", "D1", _NOMINAL),
    _term("pipe_out", "size", "input", "item", "inside diameter (or nominal size) of the outlet pipe",
          "outlet pipe size; outlet pipe diameter; outlet pipe bore; outlet line size; outlet pipe inside diameter; "
          "outlet pipe; outlet line; outlet pipe inside; "
          "outlet pipe size schedule; outlet line size schedule", "D2", _NOMINAL),
    _term("pipe_wall", "size", "input", "item", "wall thickness of the pipe after the valve",
          "pipe wall; wall thickness; pipe wall thickness; pipe thickness; outlet pipe wall thickness; wall"),
    _term("pipe_schedule", "text", "input", "item", "schedule of the pipe",
          "pipe schedule; schedule; line schedule; schedule outlet pipe; schedule inlet pipe"),
    _term("rated", "coefficient", "input", "item", "rated flow coefficient, fully open",
          "rated flow coefficient; rated coefficient; full open flow coefficient; rated kv; rated cv; selected kv; "
          "selected cv; selected flow coefficient; maximum kv; maximum cv; valve kvs; installed cv; installed kv; "
          "full open kv; full open cv; rated kvs; selected kvs; full open coefficient; design cv; design kv",
          "kvs cvs kv100", _KV_CV),
    _term("fl", "ratio", "input", "case", "liquid pressure recovery factor FL",
          "recovery factor; pressure recovery factor; liquid pressure recovery factor; liquid recovery factor; "
          "recovery coefficient; pressure recovery coefficient; pressure recovery; liquid recovery", "fl"),
    _term("fd", "ratio", "input", "item", "valve style modifier Fd", "style modifier; valve style modifier", "fd"),
    _term("xfz", "ratio", "input", "case", "pressure ratio xF at which cavitation begins",
          "incipient cavitation pressure ratio; incipient cavitation ratio; "
          "incipient cavitation differential pressure ratio; pressure ratio incipient cavitation; "
          "coefficient incipient cavitation", "xfz"),
    # --- plates -----------------------------------------------------------------------------------------------------
    _term("bore", "size", "both", "item", "bore of the plate, or of each hole",
          "bore; orifice bore; plate bore; bore diameter; orifice diameter; hole diameter; orifice size; "
          "restriction bore; hole size; orifice plate bore"),
    _term("bores", "sizes", "both", "item", "bores of a set of plates, first to last",
          "bores; plate bores; orifice bores"),
    _term("holes", "count", "input", "item", "number of equal holes", "holes; number holes"),
    _term("plates", "count", "input", "item", "number of plates in series",
          "number plates; plates; number orifices; number orifice plates; plates series"),
    _term("thickness", "size", "input", "item", "thickness of the plate",
          "plate thickness; thickness; orifice thickness; orifice plate thickness"),
    _term("bore_length", "size", "input", "item", "length of the parallel part of the bore",
          "bore length; parallel length; throat length; edge thickness; orifice edge thickness"),
    # --- claims -----------------------------------------------------------------------------------------------------
    _term("coefficient", "coefficient", "claim", "case", "required flow coefficient",
          "required flow coefficient; calculated flow coefficient; required kv; required cv; calculated kv; "
          "calculated cv; sizing kv; sizing cv; sizing coefficient; required coefficient; calculated coefficient; "
          "operating kv; operating cv; process cv; process kv", "kvreq cvreq kvcalc cvcalc",
          (*_KV_CV, ("kvreq", "Kv"), ("cvreq", "Cv"), ("kvcalc", "Kv"), ("cvcalc", "Cv"))),
    _term("ff", "ratio", "claim", "case", "liquid critical pressure ratio factor",
          "critical pressure ratio factor; liquid critical pressure ratio factor; critical pressure ratio", "ff"),
    _term("fp", "ratio", "claim", "case", "piping geometry factor",
          "piping geometry factor; pipe geometry factor; piping factor", "fp"),
    _term("flp", "ratio", "claim", "case", "combined recovery and piping geometry factor",
          "combined recovery factor; combined factor; "
          "combined liquid pressure recovery factor piping geometry factor; "
          "combined recovery piping factor; recovery factor fittings", "flp"),
    _term("travel", "share", "claim", "case", "opening",
          "travel; opening; position; valve opening; lift; stroke; valve travel; travel percent; "
          "calculated travel; percent open; "
          "operating travel; calculated opening; relative travel; valve position; stem position; "
          "plug position; open; "
          "percent opening; percent travel; percent lift; plug lift", "h"),
    _term("dp_choked", "drop", "claim", "case", "drop at which the flow chokes",
          "choked pressure drop; allowable pressure drop; terminal pressure drop; maximum allowable pressure drop; "
          "maximum sizing pressure drop; "
          "critical pressure drop; limiting pressure drop; choked flow pressure drop; pressure drop choked flow; "
          "maximum effective pressure drop; effective pressure drop; choking pressure drop; pressure drop choking; "
          "allowable differential pressure; allowable sizing pressure drop; "
          "maximum allowable sizing pressure drop; choked drop; "
          "pressure drop limit", "dpch dpmax dpt dpallow dpall dpcrit dpchoked dpterm dps"),
    _term("sigma", "ratio", "claim", "case", "cavitation index, in the form that its label states",
          "cavitation index; cavitation number; cavitation coefficient; cavitation parameter; sigma index; "
          "operating sigma; operating cavitation index; service cavitation index; sigma; sigma service", "sigma xf"),
    _term("sigma_incipient", "ratio", "claim", "item", "limit: cavitation begins",
          "incipient cavitation; incipient cavitation index; incipient limit; incipient sigma; incipient; "
          "incipient cavitation limit; incipient cavitation coefficient", "sigmai"),
    _term("sigma_constant", "ratio", "claim", "item", "limit: constant cavitation",
          "constant cavitation; constant cavitation index; constant limit; constant cavitation limit; sigma constant",
          "sigmac"),
    _term("sigma_damage", "ratio", "claim", "item", "limit: incipient damage",
          "incipient damage; sigma incipient damage; damage limit; cavitation damage limit; "
          "sigma damage; incipient damage index; "
          "incipient damage limit; cavitation damage; damage index", "sigmaid sigmad"),
    _term("sigma_vibration", "ratio", "claim", "item", "limit: maximum vibration",
          "maximum vibration; vibration limit; maximum vibration cavitation; maximum vibration index; "
          "maximum vibration limit", "sigmamv"),
    _term("sigma_choked", "ratio", "claim", "case", "index at choking",
          "choked index; choking index; cavitation index choking; choked cavitation index; sigma choked; "
          "sigma choking; choking cavitation; index choking; choked limit", "sigmach sigmachoked"),
    _term("noise", "level", "claim", "case", "A-weighted sound pressure level at 1 m",
          "noise; noise level; sound pressure level; sound pressure; sound level; "
          "calculated noise level; predicted noise; "
          "predicted sound pressure level; noise emission; predicted noise level; calculated sound pressure level; "
          "hydrodynamic noise", "lpa spl lpae lp"),
    _term("velocity_in", "velocity", "claim", "case", "velocity at the inlet",
          "inlet velocity; velocity inlet; inlet flow velocity; inlet pipe velocity; velocity inlet pipe",
          "v1 u1 w1"),
    _term("velocity_out", "velocity", "claim", "case", "velocity at the outlet",
          "outlet velocity; velocity outlet; outlet flow velocity; outlet pipe velocity; "
          "velocity outlet pipe; exit velocity",
          "v2 u2 w2"),
    _term("flash_share", "share", "claim", "case", "vapour mass fraction after the valve",
          "flash fraction; vapour fraction; flashing fraction; flash percent; percent flash; "
          "flash rate; percent flashing; "
          "vapour mass fraction; outlet vapour fraction; mass vapour outlet; vapour quality outlet; flashed vapour; "
          "flash share; flash vapour; flash mass; vapour quality; percent vapour; flash quality; "
          "vapour content outlet"),
    _term("stages", "count", "claim", "item", "number of stages in series",
          "number stages; stages; stage count; pressure reduction stages; number pressure stages"),
    _term("stage_pressures", "pressures", "claim", "case", "pressures between the stages",
          "stage pressures; interstage pressures; intermediate pressures; pressures between stages; "
          "pressure between plates; interstage pressure"),
    _term("statement", "word", "claim", "case", "a statement about cavitation, flashing, choking or turbulence",
          "cavitation; flashing; choked flow; flow regime; flow condition; cavitation check; "
          "cavitation status; regime; "
          "cavitation state; choked; flow state; cavitation assessment; cavitation verdict; cavitation level; "
          "critical flow; cavitation regime; flow type; cavitation evaluation"),
)  # fmt: skip

UNCLEAR: dict[str, tuple[str, str]] = {
    # label: (what it may be, what the vendor is to write)
    "pressure": ("inlet, outlet or design pressure", "say which: inlet or outlet"),
    "operating pressure": ("inlet or outlet pressure", "say which: inlet or outlet"),
    "size": ("the size of the valve or of the pipe", "say which: valve or pipe"),
    "diameter": ("the size of the valve, of the pipe, or a bore", "say which"),
    "dn": ("the size of the valve or of the pipe", "say which: valve or pipe"),
    "nps": ("the size of the valve or of the pipe", "say which: valve or pipe"),
    "velocity": ("the velocity at the inlet or at the outlet", "say where"),
    "flow velocity": ("the velocity at the inlet or at the outlet", "say where"),
    "fluid velocity": ("the velocity at the inlet or at the outlet", "say where"),
    "flow coefficient": ("the required or the rated flow coefficient", "say which: required or rated"),
    "kv": ("the required or the rated flow coefficient", "say which: required or rated"),
    "cv": ("the required or the rated flow coefficient", "say which: required or rated"),
    "maximum pressure drop": ("the choked drop, the largest operating drop or the shut-off drop", "say which"),
    "kc": ("the onset of cavitation damage or the first deviation of the flow", "say which of the two meanings"),
    "km": ("the square of FL, or another recovery coefficient", "give FL"),
    "cavitation limit": ("the limit at which cavitation begins, is constant, or does damage", "say which"),
    "sigma limit": ("the limit at which cavitation begins, is constant, or does damage", "say which"),
    "cavitation index limit": ("the limit at which cavitation begins, is constant, or does damage", "say which"),
    "allowable cavitation index": ("the limit at which cavitation begins, is constant, or does damage", "say which"),
    "recommended sigma": ("the limit at which cavitation begins, is constant, or does damage", "say which"),
    "recommended cavitation index": ("the limit at which cavitation begins, is constant, or does damage", "say which"),
    "minimum sigma": ("the limit at which cavitation begins, is constant, or does damage", "say which"),
    "allowable sigma": ("the limit at which cavitation begins, is constant, or does damage", "say which"),
    "required sigma": ("the limit at which cavitation begins, is constant, or does damage", "say which"),
    "minimum cavitation index": ("the limit at which cavitation begins, is constant, or does damage", "say which"),
    "required cavitation index": ("the limit at which cavitation begins, is constant, or does damage", "say which"),
    "recovery factor square": ("the square of FL", "give FL itself"),
    "critical pressure temperature": ("critical pressure or critical temperature", "give each in its own cell"),
    "pressure inlet outlet": ("inlet and outlet pressure", "give each in its own cell"),
}

OTHERS: tuple[str, ...] = (
    # What data sheets also give, which no number of this audit rests on: left alone without a word.
    "design pressure", "design temperature", "maximum design pressure", "maximum pressure", "maximum temperature",
    "minimum temperature", "design pressure temperature", "shutoff pressure", "shutoff pressure drop",
    "shutoff differential pressure", "maximum shutoff pressure drop", "test pressure", "hydrotest pressure",
    "supply pressure", "air supply", "air supply pressure", "air pressure", "instrument air pressure",
    "signal pressure", "signal range", "spring range", "bench range", "actuator", "actuator type", "actuator size",
    "positioner", "body material", "trim material", "plug material", "seat material", "stem material", "packing",
    "gasket", "bonnet", "bonnet type", "leakage", "leakage class", "seat leakage", "shutoff class",
    "pressure class", "rating", "pressure rating", "flange rating", "end connection", "connection", "connections",
    "flange", "flange facing", "weight", "mass", "rated travel", "travel length", "maximum travel", "stroke time",
    "stroke length", "critical temperature", "boiling temperature", "saturation temperature", "ambient temperature",
    "molecular weight", "specific heat", "specific heat ratio", "compressibility", "surface tension", "reynolds",
    "valve reynolds", "valve reynolds number", "reynolds number", "reynolds factor", "reynolds number factor",
    "signal", "allowable spl", "maximum spl", "allowable noise", "allowable noise level", "maximum noise",
    "maximum noise level", "maximum allowable noise", "allowable sound pressure level",
    "maximum sound pressure level", "noise limit", "maximum allowable sound pressure level", "background noise",
    "allowable velocity", "maximum velocity", "velocity limit", "sound power level", "revision", "date", "drawing",
    "drawing number", "document", "document number", "project", "project number", "customer", "client", "vendor",
    "supplier", "manufacturer", "model", "model number", "serial number", "order", "order number", "purchase order",
    "quotation", "quotation number", "page", "sheet", "plant", "unit", "area", "location", "line number",
    "pipe line number", "quantity", "remarks", "remark", "note", "notes", "prepared", "checked", "approved",
    "insulation", "pipe insulation", "pipe material", "material", "fail position", "failure position",
    "fail action", "safety position", "number", "revision number", "requisition", "requisition number", "handwheel",
    "limit switch", "solenoid valve", "face to face", "torque", "thrust", "power", "mach number", "specific volume",
    "thermal expansion", "spacing", "plate spacing", "plate material", "beta ratio", "diameter ratio",
    "support diameter", "stress", "volume", "hydraulic power", "head loss", "year", "price", "delivery", "colour",
    "paint", "nozzle", "delivery time", "currency", "tank level", "pump head", "throat pressure",
    "vena contracta pressure", "pressure ratio", "drop ratio", "authority", "valve authority", "distance",
    "loss coefficient", "discharge coefficient", "drill size", "hardness", "certificate", "inspection",
)  # fmt: skip
"""Labels known to be of no concern here; a label that no list has is said to be unread."""
