"""One fault, one message: where it stands, what it says, why, how to mend it, and nothing else beside it."""

from __future__ import annotations

import pytest

from polebook.chain.read import examine
from polebook.problem import render
from tests.chain import good
from tests.chain.good import BLOCK, CARD, FET, HEAD, JFET, LADDER, OPAMP, SOURCE, STAGE, VALVE, small, stage

FORMAT_FIX = "write format = 1"
MARK = " #!"  # ends the line that the fault stands on


def q1(keys: str) -> str:
    return small(stage=STAGE + keys)


def source(keys: str) -> str:
    return small(source="[source]\n" + keys)


def rest(text: str) -> str:
    return small(rest=text)


def arms(text: str) -> str:
    return small(stage=LADDER + f"arms = [ {text} ]{MARK}\n")


def fet(keys: str, family: str = "mosfet") -> str:
    return small(stage=stage("common-source", "id = 1e-3", "F"), card=f'[device.F]\nfamily = "{family}"\n{keys}\n')


CASES = [
    # the file
    ("format missing", small(head=""), "the file does not say its format", "begins with the format", "format = 1"),
    ("format of another kind", small(head="format = 2 #!\n"), "2 is not a known format", "only format 1 is known", FORMAT_FIX),
    ("format as text", small(head='format = "1" #!\n'), '"1" is not a known format', "plain number without quotes", FORMAT_FIX),
    ("format as a switch", small(head="format = true #!\n"), "true is not a known format", "plain number", FORMAT_FIX),
    ("format with a point", small(head="format = 1.0 #!\n"), "1.0 is not a known format", "plain number", FORMAT_FIX),
    ("title is no text", small(head="format = 1\ntitle = 3 #!\n"), "title of the file is not a text", "3 is a number", "in quotes"),
    ("note is a list", small(head="format = 1\nnote = [] #!\n"), "note of the file is not a text", "a list", "in quotes"),
    ("unknown top key", small(head='format = 1\ntitel = "x" #!\n'), 'unknown key "titel" in the file', "format, title and note",
     "write title"),
    ("key above its table", small(head="format = 1\ntemperature = 3 #!\n"), 'unknown key "temperature" in the file',
     "a key of [supply]", "put it below [supply]"),
    ("unknown table", rest("[taget] #!\nupper = 3\n"), "unknown table [taget]", "supply, source, stage", "[target]"),
    ("unknown list of tables", rest("[[stages]] #!\nname = 3\n"), "unknown table [stages]", "has the tables", "[stage]"),
    ("no source", small(source=""), "the chain has no source", "[source] is required", 'kind = "voltage"'),
    ("no stage", small(stage=""), "the chain has no stage", "1 to 64 stages", "[[stage]]"),
    ("an empty list of stages", small(head="format = 1\nstage = [] #!\n", stage=""), "the chain has no stage", "1 to 64", "[[stage]]"),
    ("stage with single brackets", small(stage='[stage] #!\nname = "a"\n'), "[stage] is written with two brackets",
     "several", "[[stage]]"),
    ("stage is a number", small(head="format = 1\nstage = 3 #!\n", stage=""), "stage is not a list of tables", "3 is a number",
     "[[stage]]"),
    ("stage list of numbers", small(head="format = 1\nstage = [3] #!\n", stage=""), "3 is not a table", "each stage is a table",
     "[[stage]]"),
    ("source with two brackets", source("").replace("[source]", "[[source]] #!"), "source is not a table", "[[source]] begins a list",
     "[source]"),
    ("supply is a text", small(head='format = 1\nsupply = "12" #!\n'), "supply is not a table", '"12" is a text', "[supply]"),
    ("device is a number", small(head="format = 1\ndevice = 3 #!\n", stage=stage("block", "gain = 1"), card=""),
     "device is not a table of cards", "3 is a number", "[device.NAME]"),
    ("too many stages", small(stage="".join(stage("block", "gain = 1", name=f"B{k}") for k in range(64))
                              + stage("block", "gain = 1").replace("]]", "]] #!")),
     "the chain has 65 stages, and at most 64 are taken", "hold in view", "split"),
    # quantities
    ("wrong dimension", q1('couple = "100 uV" #!\n'), '"100 uV" is not a capacitance', "couple of stage Q1: a capacitance is in farads",
     'couple = "100u"'),
    ("a resistance in farads", source('kind = "voltage"\nresistance = "10 nF" #!\n'), '"10 nF" is not a resistance',
     "resistance of the source", "write it in ohms"),
    ("comma", q1('stray = "2,2p" #!\n'), '"2,2p" is not a capacitance', "comma", 'stray = "2.2p"'),
    ("prefix and exponent", q1('stray = "1e-12p" #!\n'), '"1e-12p" is not a capacitance', "exponent", "1e-12"),
    ("no number", q1('stray = "some" #!\n'), '"some" is not a capacitance', "does not begin with a number", "farads"),
    ("empty", q1('stray = "" #!\n'), '"" is not a capacitance', "empty", "take the key out"),
    ("nan", q1("stray = nan #!\n"), "nan is not a capacitance", "not a number", "farads"),
    ("infinite", q1("stray = inf #!\n"), "inf is not a capacitance", "infinite", "farads"),
    ("infinite text", q1('stray = "-inf" #!\n'), '"-inf" is not a capacitance', "infinite", "farads"),
    ("too large", q1('stray = "1e400" #!\n'), '"1e400" is not a capacitance', "past the largest", "farads"),
    ("a switch", q1("stray = true #!\n"), "true is not a capacitance", "switches", "farads"),
    ("a list", q1('stray = ["1p"] #!\n'), "a list is not a capacitance", "one number", "farads"),
    ("a table", q1('stray = { c = "1p" } #!\n'), "a table is not a capacitance", "one number", "farads"),
    ("a date", q1("stray = 2026-05-04 #!\n"), "2026-05-04 is not a capacitance", "one number", "farads"),
    ("negative", q1('rb1 = "-47k" #!\n'), '"-47k" is negative', "rb1 of stage Q1 is a resistance", 'rb1 = "47k"'),
    ("negative number", q1("rb1 = -47 #!\n"), "-47 is negative", "can't be below zero", 'rb1 = "47"'),
    ("negative where zero is taken", q1("stray = -1 #!\n"), "-1 is negative", "a capacitance that can't be below zero", "without the sign"),
    ("zero resistor to a rail", q1("rb1 = 0 #!\n"), "rb1 of stage Q1 is zero", "across a port can't be zero", "take rb1 out"),
    ("zero coupling", q1("couple = 0 #!\n"), "couple of stage Q1 is zero", "cuts its path", "take couple out"),
    ("zero bypass", q1('re_bypassed = 100\nce = "0u" #!\n'), "ce of stage Q1 is zero", "cuts its path", "take ce out"),
    ("zero current", small(stage=STAGE.replace('"1m"', "0 #!")), "ic of stage Q1 is zero", "a current of zero has no meaning",
     "take ic out"),
    ("zero gain of a block", small(stage=BLOCK + "gain = 0 #!\n"), "gain of stage B1 is zero", "a ratio of zero", "give it a value"),
    # supply
    ("negative rail above ground", rest('[supply]\nnegative = "12" #!\n'), "negative of the supply is above zero", "with its sign",
     'negative = "-12"'),
    ("positive rail below ground", rest("[supply]\npositive = -12 #!\n"), "-12 is negative", "positive of the supply", "without the sign"),
    ("absolute zero", rest("[supply]\ntemperature = -273.15 #!\n"), "temperature of the supply is -273.15 °C", "absolute zero", "Celsius"),
    ("unknown supply key", rest("[supply]\npostive = 12 #!\n"), 'unknown key "postive" in the supply',
     "the keys positive, negative and temperature", "write positive"),
    # source
    ("source without kind", small(source="[source] #!\nresistance = 1\n"), "the source has no kind", "kind is required",
     'kind = "voltage"'),
    ("source of a strange kind", source('kind = "volts" #!\nresistance = 1\n'), '"volts" is not a kind', "voltage or current",
     'kind = "voltage"'),
    ("source kind is a number", source("kind = 1 #!\nresistance = 1\n"), "kind of the source is a number, not a text",
     "voltage or current", 'kind = "voltage"'),
    ("voltage without resistance", small(source='[source] #!\nkind = "voltage"\n'), "the source has no resistance", "in series",
     "resistance = 0"),
    ("current with couple", source('kind = "current"\ncouple = "1u" #!\n'), "a current source takes no couple", "changes nothing",
     "take couple out"),
    ("current across a short", source('kind = "current"\nresistance = 0 #!\n'), "resistance of the source is zero", "across a port",
     "take resistance out"),
    ("amplitude of the wrong unit", source('kind = "current"\nlargest = "1 mV" #!\n'), '"1 mV" is not a current', "amperes",
     'largest = "1m"'),
    ("smallest above largest", source('kind = "voltage"\nresistance = 1\nlargest = "1m"\nsmallest = "2m" #!\n'),
     "smallest of the source is above largest", '"2m" is more than "1m"', "exchange"),
    ("note in the source", small(source=SOURCE + 'note = "x" #!\n'), 'unknown key "note" in the source', "has the keys kind",
     "take it out"),
    # load and budget
    ("allot of an uncoupled load", rest("[load]\nallot = 1 #!\n"), "the load has allot and no couple", "node of its own", "add couple"),
    ("load of zero ohms", rest("[load]\nresistance = 0 #!\n"), "resistance of the load is zero", "across a port", "take resistance out"),
    ("claims over the budget", small(source=SOURCE + "allot = 2\n", stage=STAGE + "allot = 1.5 #!\n"), "the allotments sum to 3.5 dB",
     "source and Q1 claim more than the 3.0103 dB", "allot keys"),
    ("claims of the load", small(stage=STAGE + "allot = 2\n", rest='[load]\ncouple = "1u"\nallot = 2 #!\n'),
     "the allotments sum to 4 dB", "Q1 and load", "allot keys"),
    # target, preferred, tolerance
    ("unknown target", rest('[target]\ngian = "40 dB" #!\n'), 'unknown key "gian" in the target', "has the keys gain", "write gain"),
    ("gain of a voltage source in ohms", rest('[target]\ngain = "40 ohm" #!\n'), '"40 ohm" is not a ratio', "gain of the target", "V/V"),
    ("noise of the wrong unit", rest('[target]\nnoise = "1 pA/√Hz" #!\n'), '"1 pA/√Hz" is not a voltage noise density', "V/√Hz",
     'noise = "1p"'),
    ("noise band turned over", rest("[target]\nnoise_from = 100 #!\nnoise_to = 10\n"), "noise_from of the target is not below noise_to",
     "upward", "exchange"),
    ("yield over all", rest('[target]\nyield = "120 %" #!\n'), "yield of the target is 120 %", "no more than all", "at most 100 %"),
    ("overshoot in farads", rest('[target]\novershoot = "5 pF" #!\n'), '"5 pF" is not a share', "overshoot of the target", "%"),
    ("unknown series", rest('[preferred]\nresistor = "E25" #!\n'), '"E25" is not a resistor', "E3, E6, E12, E24, E48, E96 or E192",
     'resistor = "E24"'),
    ("tolerance of 5", rest("[tolerance]\ncapacitor = 5 #!\n"), "capacitor of [tolerance] is 500 %", "could reach zero", '"5 %"'),
    ("tolerance below zero", rest('[tolerance]\nbeta = "-5 %" #!\n'), '"-5 %" is negative', "beta of [tolerance]", 'beta = "5 %"'),
    ("unknown shape", rest('[tolerance]\nshape = "gauss" #!\n'), '"gauss" is not a shape', "normal or uniform", 'shape = "normal"'),
    ("unknown tolerance", rest("[tolerance]\nresistors = 0.01 #!\n"), 'unknown key "resistors" in [tolerance]', "has the keys resistor",
     "write resistor"),
    # bench
    ("bench with single brackets", rest("[bench] #!\ngain = 3\n"), "[bench] is written with two brackets", "several", "[[bench]]"),
    ("date as text", rest('[[bench]]\ndate = "2026-05-04" #!\n'), '"2026-05-04" is not a date', "TOML date", "without quotes"),
    ("date with a time", rest("[[bench]]\ndate = 2026-05-04T10:00:00 #!\n"), "2026-05-04 10:00:00 is not a date", "without a time",
     "2026-05-04"),
    ("bench at no stage", rest('[[bench]]\nat = "Q2" #!\n'), 'there is no stage "Q2"', "the stages are Q1", 'at = "Q1"'),
    ("unknown bench key", rest("[[bench]]\nuper = 3 #!\n"), 'unknown key "uper" in bench 1', "has the keys date", "write upper"),
    ("gain of a bench in ohms", rest('[[bench]]\ngain = "5 V/A" #!\n'), '"5 V/A" is not a ratio', "gain of bench 1", "V/V"),
    # names
    ("stage without name", small(stage=STAGE.replace('name = "Q1"\n', "").replace("]]", "]] #!")), "stage number 1 has no name",
     "every stage has a name", 'name = "Q1"'),
    ("reserved name", small(stage=STAGE.replace('"Q1"', '"load" #!')), '"load" can\'t be the name of a stage', "part of every chain",
     "another name"),
    ("name of a node", small(stage=STAGE.replace('"Q1"', '"n12" #!')), '"n12" can\'t be the name of a stage', "name of a node",
     "another name"),
    ("name with a blank", small(stage=STAGE.replace('"Q1"', '"Q 1" #!')), '"Q 1" can\'t be the name of a stage', "letters, digits",
     'name = "Q1"'),
    ("name with a line end", small(stage=STAGE.replace('"Q1"', '"Q1\\n" #!')), "can't be the name of a stage", "letters, digits",
     'name = "Q1"'),
    ("name is a number", small(stage=STAGE.replace('"Q1"', "1 #!")), "1 can't be the name of a stage", "is a text", 'name = "Q1"'),
    ("empty name", small(stage=STAGE.replace('"Q1"', '"" #!')), '"" can\'t be the name of a stage', "at least one", 'name = "Q1"'),
    ("two of a name", small(stage=STAGE + STAGE.replace('"Q1"', '"Q1" #!')), 'a second stage is named "Q1"', "first stands in line 6",
     "another name"),
    ("card name with a blank", small(card=CARD + '[device."D 2"] #!\nfamily = "bjt"\n'), '"D 2" can\'t be the name of a card',
     "letters, digits", "another name"),
    ("card name with a dot", small(card=CARD + '[device."D.2"] #!\nfamily = "bjt"\n'), '"D.2" can\'t be the name of a card',
     "letters, digits", "another name"),
    ("a card that is a number", small(card=CARD + "[device]\nX = 3 #!\n"), '"X" of device is not a card', "a table of its own",
     "[device.X]"),
    # kinds and their cards
    ("no kind", small(stage=STAGE.replace('kind = "common-emitter"\n', "").replace("]]", "]] #!")), "stage Q1 has no kind",
     "common-emitter, common-source", "add kind"),
    ("unknown kind", small(stage=STAGE.replace('"common-emitter"', '"common-emiter" #!')), '"common-emiter" is not a kind of stage',
     "the kinds are", 'kind = "common-emitter"'),
    ("kind is a number", small(stage=STAGE.replace('"common-emitter"', "3 #!")), "3 is not a kind of stage", "the kinds are",
     "one of these"),
    ("no device", small(stage=STAGE.replace('device = "D"\n', "").replace("]]", "]] #!")), "stage Q1 has no device",
     "takes a bjt card", 'device = "D"'),
    ("no device and no card", small(stage=STAGE.replace('device = "D"\n', "").replace("]]", "]] #!"), card=""), "stage Q1 has no device",
     "takes a bjt card", "[device.D]"),
    ("no such card", small(stage=STAGE.replace('"D"', '"DD" #!')), 'there is no card "DD"', "the cards of this file are D",
     'device = "D"'),
    ("no card at all", small(stage=STAGE.replace('"D"', '"D" #!'), card=""), 'there is no card "D"', "this file has no cards",
     "[device.D]"),
    ("device is a number", small(stage=STAGE.replace('"D"', "1 #!")), "1 is not the name of a card", "[device.NAME]", 'device = "D"'),
    ("card of another family", small(stage=STAGE.replace('"D"', '"F" #!'), card=CARD + FET), "a common-emitter stage takes no mosfet card",
     "card F, of family mosfet", 'kind = "common-source", or name the card D'),
    ("op-amp in a cascode", small(stage=stage("cascode", 'ic = 1e-3\nupper = "A" #!', "D"), card=CARD + OPAMP),
     "a cascode stage takes no opamp card", "takes bjt, mosfet or jfet", "D"),
    ("valve in a cascode", small(stage=stage("cascode", "", "V").replace('"V"', '"V" #!'), card=VALVE), "a cascode stage takes no triode card",
     "bjt, mosfet or jfet", "family bjt, mosfet or jfet"),
    ("upper card missing", small(stage=stage("cascode", 'upper = "E" #!', "D")), 'there is no card "E"', "upper of stage S1", "[device.E]"),
    ("opposite polarity", small(stage=stage("cascode", 'upper = "P" #!', "D"), card=CARD + '[device.P]\nfamily = "mosfet"\nk = 1\npolarity = "p"\n'),
     "the devices of stage S1 are of opposite polarity", "D is npn, P is p", "same polarity"),
    # keys
    ("unknown key", q1("rcc = 3 #!\n"), 'unknown key "rcc" in stage Q1', "no kind of stage takes it", "write rc"),
    ("nothing near", q1("zzzzzz = 3 #!\n"), 'unknown key "zzzzzz" in stage Q1', "polebook kinds common-emitter", "take it out"),
    ("key of another family", small(stage=stage("common-source", 'id = 1e-3\nrc = "2k2" #!', "F"), card=FET), 'unknown key "rc" in stage S1',
     "a common-source stage with a mosfet card writes rd", "write rd"),
    ("bias of another family", q1("rg1 = 3 #!\n"), 'unknown key "rg1" in stage Q1', "writes rb1", "write rb1"),
    ("key of another kind", small(stage=stage("emitter-follower", 'ic = 1e-3\nrc = "2k2" #!', "D")), 'unknown key "rc" in stage S1',
     "common-emitter, common-base and cascode do", "change the kind"),
    ("rf on a cascode", small(stage=stage("cascode", 'ic = 1e-3\nrf = "1M" #!', "D")), 'unknown key "rf" in stage S1', "does not take it",
     "change the kind"),
    ("device on a block", small(stage=BLOCK + 'gain = 1\ndevice = "D" #!\n'), 'unknown key "device" in stage B1', "does not take it",
     "take it out"),
    ("fet keys in a bjt cascode", small(stage=stage("cascode", 'ic = 1e-3\nrd = "1k" #!', "D")), 'unknown key "rd" in stage S1',
     "writes rc", "write rc"),
    ("left_out as text", q1('left_out = "true" #!\n'), '"true" is not true or false', "left_out of stage Q1 is a switch", "left_out = true"),
    ("unknown rail", q1('lower_to = "minus" #!\n'), '"minus" is not a lower_to', "positive, ground or negative", "lower_to"),
    ("note of a stage", q1("note = 3 #!\n"), "note of stage Q1 is not a text", "3 is a number", "in quotes"),
    # keys that belong together
    ("c_rf alone", q1('c_rf = "1n" #!\n'), "c_rf of stage Q1 stands without rf", "in series with rf", "add rf"),
    ("r_comp alone", q1("r_comp = 100 #!\n"), "r_comp of stage Q1 stands without c_comp", "in series with c_comp", "add c_comp"),
    ("ce alone", q1('ce = "100u" #!\n'), "ce of stage Q1 stands without re_bypassed", "it bypasses re_bypassed", "add re_bypassed"),
    ("c_peak alone", q1('c_peak = "10p" #!\n'), "c_peak of stage Q1 stands without re", "unbypassed", "add re"),
    ("l_peak alone", small(stage=STAGE.replace('rc = "2k2"', 'l_peak = "1u" #!')), "l_peak of stage Q1 stands without rc", "output resistor",
     "add rc"),
    ("cb alone", small(stage=stage("common-base", 'ic = 1e-3\ncb = "1u" #!', "D")), "cb of stage S1 stands without rb1 or rb2",
     "bias resistors", "add rb1"),
    ("rg with a divider", small(stage=stage("common-source", "id = 1e-3\nrg1 = 3\nrg = 3 #!", "F"), card=FET),
     "stage S1 has rg together with rg1", "one or the other", "take rg out"),
    ("c_rg alone", small(stage=stage("noninverting", 'rf = 1\nc_rg = "1u" #!', "A"), card=OPAMP), "c_rg of stage S1 stands without rg",
     "in series with rg", "add rg"),
    ("rg without rf", small(stage=stage("noninverting", "rg = 1", "A").replace("]]", "]] #!"), card=OPAMP), "stage S1 has rg and no rf",
     "1 + rf/rg", "add rf"),
    ("inverting without rf", small(stage=stage("inverting", "rg = 1", "A").replace("]]", "]] #!"), card=OPAMP), "stage S1 has no rf",
     "rf is required: feedback resistor", "rf ="),
    ("inverting without rg", small(stage=stage("inverting", "rf = 1", "A").replace("]]", "]] #!"), card=OPAMP), "stage S1 has no rg",
     "rg is required", "rg ="),
    ("transimpedance of zero", small(stage=stage("transimpedance", "rf = 0 #!", "A"), card=OPAMP), "rf of stage S1 is zero", "can't be zero",
     "give it a value"),
    # blocks
    ("block without gain", small(stage=BLOCK.replace("]]", "]] #!")), "stage B1 has no gain", "gain is required", "gain ="),
    ("gain in dB without sign", small(stage=BLOCK + 'gain = "20 dB" #!\n'), "gain of stage B1 is in dB and has no sign", "10 or -10",
     "inverting = true"),
    ("plain gain with inverting", small(stage=BLOCK + "gain = -10\ninverting = true #!\n"), "gain and inverting of stage B1 both say the sign",
     "its own sign", "take inverting out"),
    ("inverting is a text", small(stage=BLOCK + 'gain = "20 dB"\ninverting = "yes" #!\n'), '"yes" is not true or false', "a switch",
     "inverting = true or"),
    ("gain is a text", small(stage=BLOCK + 'gain = "much" #!\n'), '"much" is not a ratio', "gain of stage B1", "V/V or dB"),
    ("nf and en", small(stage=BLOCK + 'gain = 1\nen = "1n"\nnf = 3 #!\n'), "stage B1 has nf and en", "both say the voltage noise", "take one"),
    ("nf_source alone", small(stage=BLOCK + "gain = 1\nnf_source = 50 #!\n"), "nf_source of stage B1 stands without nf", "measured",
     "add nf"),
    ("poles are one number", small(stage=BLOCK + 'gain = 1\npoles = "1M" #!\n'), "poles of stage B1 is not a list", '"1M" is a text',
     'poles = ["100k"]'),
    ("a pole is none", small(stage=BLOCK + 'gain = 1\npoles = ["1M", "x"] #!\n'), '"x" is not a frequency', "poles of stage B1", "hertz"),
    ("a pole of zero", small(stage=BLOCK + "gain = 1\nlower_poles = [0] #!\n"), "lower_poles of stage B1 is zero", "a frequency of zero",
     "give it a value"),
    ("too many poles", small(stage=BLOCK + f"gain = 1\npoles = {list(range(1, 66))} #!\n"), "poles of stage B1 lists 65 values", "data sheet",
     "far from the band"),
    # ladders
    ("no arms", small(stage=LADDER.replace("]]", "]] #!")), "stage L1 has no arms", "arms is required", "arms ="),
    ("arms are a table", small(stage=LADDER + 'arms = { series_r = "50" } #!\n'), "arms of stage L1 is not a list", "a table", "in brackets"),
    ("no arm", arms(""), "stage L1 has no arm", "at least one", "series_r"),
    ("an arm is a number", arms("{ series_r = 1 }, 3"), "3 is not an arm", "a table of its parts", "in braces"),
    ("an empty arm", arms("{ series_r = 1 }, { }"), "arm 2 of stage L1 has no part", "series_r, series_l", "series_r"),
    ("mixed arm", arms("{ series_r = 1, shunt_c = 1e-9 }"), "arm 1 of stage L1 holds series and shunt parts", "one or the other",
     "two arms"),
    ("unknown part", arms("{ series_r = 1, serie_c = 1 }"), 'unknown key "serie_c" in arm 1 of stage L1', "the keys series_r",
     "write series_c"),
    ("part of the wrong dimension", arms('{ shunt_c = "50 ohm" }'), '"50 ohm" is not a capacitance', "shunt_c of arm 1 of stage L1",
     'shunt_c = "50"'),
    ("unknown role", arms('{ shunt_c = 1e-9, role = "hi" }'), '"hi" is not a role', "low or high", 'role = "high"'),
    ("shorting shunt", arms("{ shunt_r = 0 }"), "shunt_r of arm 1 of stage L1 is zero", "shorts the signal", "take shunt_r out"),
    ("shorting zero in parallel", arms("{ series_r = 0, series_l = 1e-6 }"), "series_r of arm 1 of stage L1 is zero", "in parallel",
     "take series_r out"),
    ("zero coupling arm", arms("{ series_c = 0 }"), "series_c of arm 1 of stage L1 is zero", "coupling", "take series_c out"),
    ("open series arm", arms('{ series_r = 1 }, { series_c = "1n", role = "high" }'), "arm 2 of stage L1 cuts the chain at midband",
     "its series_c is open at midband, so no signal passes", 'role = "low"'),
    ("open series coil", arms('{ series_l = "1u", role = "low" }'), "arm 1 of stage L1 cuts the chain at midband", "no signal passes",
     'role = "high"'),
    ("shorting shunt capacitor", arms('{ shunt_c = "1u", role = "low" }'), "arm 1 of stage L1 cuts the chain at midband",
     "shorted to ground", "resistor in series"),
    ("shorting trap", arms('{ shunt_c = "1u", role = "low", shunt_l = 0, shunt_r = 0 }'), "arm 1 of stage L1 cuts the chain at midband",
     "stand in series, each a short", "change its role"),
    ("too many arms", arms(", ".join(["{ series_r = 1 }"] * 257)), "stage L1 has 257 arms", "hold in view", "split"),
    # free and tolerance
    ("free is a text", q1('free = "rc" #!\n'), "free of stage Q1 is not a list", '"rc" is a text', "in brackets"),
    ("free holds a number", q1("free = [3] #!\n"), "3 is not a key", "free of stage Q1 lists names", "in quotes"),
    ("free names no key", q1('free = ["rcc"] #!\n'), '"rcc" can\'t be free', "no such key", "write rc"),
    ("free names no number", q1('free = ["kind"] #!\n'), '"kind" can\'t be free', "no number that planning could change", "take it out"),
    ("free names no arm", small(stage=LADDER + 'arms = [ { series_r = 1 } ]\nfree = ["arms.2.series_r"] #!\n'),
     '"arms.2.series_r" can\'t be free', "no such key", "arms.1.series_r"),
    ("tolerance is a text", q1('tolerance = "1 %" #!\n'), "tolerance of stage Q1 is not a table", "each part has its own", "{ KEY ="),
    ("tolerance of no part", q1('tolerance = { rcc = "1 %" } #!\n'), 'unknown key "rcc" in the tolerances of stage Q1', "no such part",
     "write rc"),
    ("tolerance of no share", q1('tolerance = { rc = "1 k" } #!\n'), '"1 k" is not a share', "rc of the tolerances of stage Q1", "%"),
    ("tolerance of a current", q1('tolerance = { ic = "1 %" } #!\n'), 'unknown key "ic" in the tolerances of stage Q1', "no tolerance of its own",
     "take it out"),
    ("tolerance of all", q1("tolerance = { rc = 1 } #!\n"), "tolerance of rc of stage Q1 is 100 %", "could reach zero", '"1 %"'),
    # cards
    ("no family", small(card=CARD + "[device.X] #!\nidss = 1e-3\n"), "card X has no family", "bjt, mosfet, jfet, triode or opamp",
     'family = "jfet", which its keys fit'),
    ("unknown family", small(card=CARD + '[device.X]\nfamily = "mosfett" #!\n'), '"mosfett" is not a family of cards', "bjt, mosfet",
     'family = "mosfet"'),
    ("family is a number", small(card=CARD + "[device.X]\nfamily = 3 #!\n"), "3 is not a family of cards", "bjt, mosfet", "write bjt"),
    ("unknown key of a card", small(card=CARD + "betta = 3 #!\n"), 'unknown key "betta" in card D', "a bjt card has no such key", "write beta"),
    ("key of another card", small(card=CARD + "idss = 3 #!\n"), 'unknown key "idss" in card D', "belongs to jfet cards", "take it out"),
    ("polarity of another family", fet('k = 1\npolarity = "npn" #!'), '"npn" is not a polarity', "n or p", 'polarity = "n"'),
    ("polarity in capitals", small(card=CARD + 'polarity = "NPN" #!\n'), '"NPN" is not a polarity', "npn or pnp", 'polarity = "npn"'),
    ("ft without its current", small(card=CARD + 'ft = "300M" #!\n'), "ft of card D stands without ft_ic", "measured", "add ft_ic"),
    ("current without ft", small(card=CARD + 'ft_ic = "1m" #!\n'), "ft_ic of card D stands without ft", "ft was measured", "add ft"),
    ("cob_v without cob", small(card=CARD + "cob_v = 5 #!\n"), "cob_v of card D stands without cob", "measured", "add cob"),
    ("cob without cob_v", small(card=CARD + 'cob = "3p" #!\n'), "cob of card D stands without cob_v or cmu", "measured", "add cob_v"),
    ("negative transit time", small(card=CARD + 'ft = "300M" #!\nft_ic = "1m"\ncob = "30p"\ncob_v = 5\n'), "ft of card D is too high",
     "the 30.0 pF of c_be0 and cob alone allow 206 MHz", "data sheet"),
    ("negative transit time with cmu", small(card=CARD + 'ft = "300M" #!\nft_ic = "1m"\ncmu = "30p"\n'), "ft of card D is too high",
     "c_be0 and cmu", "data sheet"),
    ("ciss below crss", fet('k = 1\nciss = "2p" #!\ncrss = "3p"'), "ciss of card F is below crss", "cgs = ciss - crss would be -1.00 pF",
     "data sheet"),
    ("coss below crss", fet('k = 1\ncoss = "2p" #!\ncrss = "3p"'), "coss of card F is below crss", "cds = coss - crss", "data sheet"),
    ("ciss without crss", fet('k = 1\nciss = "2p" #!'), "ciss of card F stands without crss or cgs", "cgs is ciss less crss", "add crss"),
    ("k said twice", fet("k = 1 #!\ngm = 1\ngm_id = 1"), "card F states k, gm and gm_id together", "k = gm²/(2·gm_id)", "take k out"),
    ("vgs_off said twice", fet("idss = 1\nvgs_off = 1 #!\ngm = 1\ngm_id = 1", "jfet"),
     "card F states vgs_off, idss, gm and gm_id together", "says vgs_off already", "take vgs_off out"),
    ("gm_id without gm", fet("k = 1\ngm_id = 1 #!"), "gm_id of card F stands without gm", "measured", "add gm"),
    ("gm and rp", small(stage=stage("common-cathode", "ia = 1e-3", "V"), card=VALVE.replace('"1.6m"', '"1.6m" #!') + "rp = 3\n"), "card V states gm and rp together",
     "rp = mu/gm", "take gm out, or rp"),
    ("corner without noise", small(stage=stage("noninverting", device="A"), card=OPAMP + "en_corner = 3 #!\n"),
     "en_corner of card A stands without en", "corner of the noise", "add en"),
    # cards in use
    ("bjt without beta", small(card='[device.D] #!\nfamily = "bjt"\n'), "card D has no beta", "beta/gm", "add beta"),
    ("mosfet without k", fet("").replace("[device.F]", "[device.F] #!"), "card F has no k", "gm = √(2·k·id)", "add k"),
    ("jfet without vgs_off", fet("idss = 1", "jfet").replace("[device.F]", "[device.F] #!"), "card F has no vgs_off", "idss and vgs_off",
     "add idss and vgs_off"),
    ("jfet gm at a current alone", fet("gm = 1\ngm_id = 1", "jfet").replace("[device.F]", "[device.F] #!"), "card F has no idss",
     "only with idss", "take gm_id out"),
    ("triode without mu", small(stage=stage("common-cathode", "ia = 1e-3", "V"), card='[device.V] #!\nfamily = "triode"\ngm = 1\n'),
     "card V has no mu", "mu/gm", "add mu"),
    ("triode without gm", small(stage=stage("common-cathode", "ia = 1e-3", "V"), card='[device.V] #!\nfamily = "triode"\nmu = 1\n'),
     "card V has no gm", "neither gm nor rp", "add gm"),
    ("op-amp without gbw", small(stage=stage("noninverting", device="A"), card='[device.A] #!\nfamily = "opamp"\n'), "card A has no gbw",
     "dominant pole", "add gbw"),
    ("an upper card that says little", small(stage=stage("cascode", 'ic = 1e-3\nupper = "F"', "D"),
                                             card=CARD + '[device.F] #!\nfamily = "mosfet"\n'), "card F has no k", "gm", "add k"),
]  # fmt: skip


@pytest.mark.parametrize(("text", "what", "why", "fix"), [case[1:] for case in CASES], ids=[case[0] for case in CASES])
def test_one_fault_one_message(text, what, why, fix):
    chain, problems = examine(text, "chain.toml")
    assert chain is None
    assert len(problems) == 1, "\n".join(render(problem, text) for problem in problems)
    problem = problems[0]
    assert problem.severity == "fault"
    assert what in problem.what
    assert why in problem.why
    assert fix in problem.fix
    marked = [number for number, line in enumerate(text.split("\n"), 1) if line.endswith(MARK)]
    assert problem.place is not None
    assert problem.place.file == "chain.toml"
    assert [problem.place.line] == (marked or [0])
    if marked:
        line = text.split("\n")[problem.place.line - 1]
        assert 1 <= problem.place.column <= problem.place.column + problem.place.width - 1 <= len(line.removesuffix(MARK).rstrip())


def test_no_two_cases_are_the_same():
    assert len({case[0] for case in CASES}) == len(CASES)
    assert len({case[1] for case in CASES}) == len(CASES)


def test_every_fault_is_told_at_once_in_the_order_of_the_file():
    text = (
        "format = 3\n"
        '[source]\nkind = "voltage"\nresistance = "10 nF"\n'
        '[[stage]]\nname = "Q1"\nkind = "common-emiter"\n'
        '[[stage]]\nname = "Q1"\nkind = "common-emitter"\ndevice = "E"\nrd = 3\nrb2 = -1\n'
        "[target]\nuper = 3\n"
        '[device.D]\nfamily = "bjt"\nbeta = nan\n'
    )
    _, problems = examine(text, "x")
    assert [problem.what for problem in problems] == [
        "3 is not a known format", '"10 nF" is not a resistance', '"common-emiter" is not a kind of stage',
        'a second stage is named "Q1"', 'there is no card "E"', 'unknown key "rd" in stage number 2', "-1 is negative",
        'unknown key "uper" in the target', "nan is not a plain number",
    ]  # fmt: skip
    lines = [problem.place.line for problem in problems]
    assert lines == sorted(lines)


def test_syntax_faults_of_toml_come_back_as_problems():
    chain, problems = examine("format = 1\nrc = = 3\n", "x.toml")
    assert chain is None
    assert (problems[0].place.file, problems[0].place.line) == ("x.toml", 2)


def test_a_file_of_nonsense_ends_soon_and_says_so():
    _, problems = examine("[source]\n" + "".join(f"a{k} = 1\n" for k in range(5000)), "x")
    assert len(problems) == 1001
    assert "over 1000 faults" in problems[-1].what


def test_a_message_repeats_no_more_than_the_beginning_of_a_long_value():
    _, problems = examine(good.small(stage=STAGE + f'stray = "{"9" * 5000}"\n{"k" * 3000} = 1\n'), "x")
    assert len(problems) == 2
    assert all(len(problem.what) < 200 for problem in problems)


def test_control_characters_in_a_text_stay_in_the_text():
    chain, _ = examine(small(head='format = 1\ntitle = "a\\u001b[31mb"\n'), "x")
    assert chain.title == "a\x1b[31mb"


def test_the_head_alone_is_not_enough():
    assert [problem.what for problem in examine(HEAD, "x")[1]] == ["the chain has no source", "the chain has no stage"]


def test_jfet_with_gm_at_a_current_and_idss_is_enough():
    assert examine(fet("gm = 1\ngm_id = 1\nidss = 1", "jfet"), "x")[0] is not None
    assert examine(small(stage=stage("common-source", "id = 1e-3", "J"), card=JFET), "x")[0] is not None
