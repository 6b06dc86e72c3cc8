-- A board of our own invention for the tests: eight copper layers, 1.6 mm, and a via on it.
local ls = require "libstub"

local f = {}

local function copper(name, kind, tol)
  return { name = name, kind = kind, thickness = ls.um(30), tol_plus = tol, tol_minus = tol }
end

local function resin(name, thickness)
  return { name = name, kind = "dielectric", thickness = thickness, dk = 3.6, loss_tangent = 0.004, f_ref = 1e10,
    in_plane_ratio = 1.1, tol_plus = thickness / 10, tol_minus = thickness / 10 }
end

function f.layers()
  return {
    copper("TOP", "signal"), resin("R1", ls.um(100)), copper("GND1", "plane", ls.um(3)), resin("R2", ls.um(150)),
    copper("SIG1", "signal"), resin("R3", ls.um(150)), copper("GND2", "plane"), resin("R4", ls.um(400)),
    copper("GND3", "plane"), resin("R5", ls.um(150)), copper("SIG2", "signal"), resin("R6", ls.um(150)),
    copper("PWR", "mixed"), resin("R7", ls.um(260)), copper("BOTTOM", "signal"),
  }
end

function f.stackup()
  return assert(ls.stackup(f.layers()))
end

function f.options(change)
  local o = { drill = ls.mm(0.25), pad = ls.mm(0.5), antipad = ls.mm(0.8), connects = { "TOP", "SIG1" },
    returns = { count = 4, distance = ls.mm(1) } }
  for key, value in pairs(change or {}) do o[key] = value end
  return o
end

function f.via(stackup, change)
  return assert(ls.via(stackup, f.options(change)))
end

-- Ports for the via above, and a small Touchstone file of two ports.
f.ports = { { layer = "TOP", impedance = 50, dk = 3 }, { layer = "SIG1", distance = 2e-3, trace = { kind = "stripline", width = 0.15e-3,
  height_below = 0.15e-3, height_above = 0.15e-3, dielectric_below = { dk = 3.6, loss_tangent = 0.004 } } } }
f.touchstone = "! of our own invention\n# GHz S RI R 50\n" ..
  "1 0.1 0 0.9 -0.1 0.9 -0.1 0.1 0\n2 0.1 0.1 0.8 -0.2 0.8 -0.2 0.1 0.1\n3 0.2 0 0.7 -0.3 0.7 -0.3 0.2 0\n"

f.signal = { symbol_rate = ls.gbd(53.125), levels = 4 }
f.criteria = { notch_over_nyquist = 2, added_loss_db = 0.5 }
f.capability = { depth_tolerance = ls.um(50), cut_clearance = ls.um(75), residual_min = ls.um(125),
  residual_target = ls.um(200), bit_oversize = ls.um(200), wall_clearance = ls.um(100), aspect_ratio = 12 }

-- ---- a small board file ----
--
-- Two vias of a pair from TOP to IN1, two ground vias, a pin, a hole that nothing connects to; no antipad anywhere.

f.rules = [[
signal LINK symbol_rate 40 GBd levels 2 notch_over_nyquist 2 added_loss 0.5 dB
net TX_* LINK
pair _P _N separate
returns GND within 1.5 mm
pin PRESS length 1.0 mm
default in_plane_ratio 1.1
default antipad 0.7 mm
fab depth_tolerance 0.05 mm
fab cut_clearance 0.05 mm
fab residual_target 0.15 mm
fab bit_oversize 0.2 mm
fab wall_clearance 0.1 mm
fab aspect_ratio 10
]]

local board_layers = {
  { "TOP", "CONDUCTOR", 0.035 }, { "D1", "DIELPREG", 0.2 }, { "GND1", "PLANE", 0.03 }, { "D2", "DIELCORE", 0.2 },
  { "IN1", "CONDUCTOR", 0.03 }, { "D3", "DIELPREG", 1.2 }, { "BOTTOM", "CONDUCTOR", 0.035 },
}
local holes = {
  { "TX_P", "VIA", "VIA", 0.25, 10, 10 }, { "TX_N", "VIA", "VIA", 0.25, 11, 10 },
  { "GND", "VIA", "VIA", 0.25, 10, 11 }, { "GND", "VIA", "VIA", 0.25, 11, 11 }, { "TX_P", "PLATED", "PRESS", 0.6, 20, 10 },
  { "LONE", "VIA", "VIA", 0.25, 30, 10, alone = true },
}

function f.board_xml()
  local out = {}
  local function line(...) out[#out + 1] = string.format(...) end
  line '<?xml version="1.0" encoding="UTF-8"?>'
  line '<!-- A board of our own invention, for tests. -->'
  line '<IPC-2581 revision="C" xmlns="http://webstds.ipc.org/2581"><Content roleRef="Owner">'
  line '<FunctionMode mode="FABRICATION"/><StepRef name="SPARROW"/>'
  line '<DictionaryLineDesc units="MILLIMETER"><EntryLineDesc id="W"><LineDesc lineEnd="ROUND" lineWidth="0.1"/></EntryLineDesc></DictionaryLineDesc>'
  line '<DictionaryStandard units="MILLIMETER"><EntryStandard id="C"><Circle diameter="0.5"/></EntryStandard></DictionaryStandard></Content>'
  line '<Ecad name="Design"><CadHeader units="MILLIMETER">'
  line '<Spec name="RESIN"><Dielectric type="DIELECTRIC_CONSTANT"><Property value="3.6"/></Dielectric><Dielectric type="LOSS_TANGENT"><Property value="0.004"/></Dielectric></Spec>'
  line '</CadHeader><CadData>'
  for _, l in ipairs(board_layers) do line('<Layer name="%s" layerFunction="%s" side="INTERNAL" polarity="POSITIVE"/>', l[1], l[2]) end
  line '<Layer name="DRILL" layerFunction="DRILL" side="ALL" polarity="POSITIVE"><Span fromLayer="TOP" toLayer="BOTTOM"/></Layer>'
  line '<Stackup name="SPARROW_4" overallThickness="1.73" whereMeasured="METAL"><StackupGroup name="ALL" thickness="1.73">'
  for i, l in ipairs(board_layers) do
    line('<StackupLayer layerOrGroupRef="%s" thickness="%g" tolPlus="0" tolMinus="0" sequence="%d"><SpecRef id="RESIN"/></StackupLayer>', l[1], l[3], i)
  end
  line '</StackupGroup></Stackup><Step name="SPARROW"><Datum x="0" y="0"/>'
  for _, layer in ipairs { "TOP", "IN1" } do
    line('<LayerFeature layerRef="%s">', layer)
    for _, h in ipairs(holes) do
      if h.alone then break end    -- the last one
      line('<Set net="%s"><Features><Location x="0" y="0"/><Polyline><PolyBegin x="%g" y="%g"/><PolyStepSegment x="%g" y="%g"/><LineDescRef id="W"/></Polyline></Features></Set>',
        h[1], h[5], h[6], h[5] + 0.3, h[6] - 0.4)
      line('<Set net="%s" padUsage="VIA"><Pad><Location x="%g" y="%g"/><StandardPrimitiveRef id="C"/></Pad></Set>', h[1], h[5], h[6])
    end
    line '</LayerFeature>'
  end
  line '<LayerFeature layerRef="DRILL">'
  for i, h in ipairs(holes) do
    line('<Set net="%s" geometry="%s"><Hole name="H%d" diameter="%g" platingStatus="%s" plusTol="0" minusTol="0" x="%g" y="%g"/></Set>',
      h[1], h[3], i, h[4], h[2], h[5], h[6])
  end
  line '</LayerFeature></Step></CadData></Ecad></IPC-2581>'
  return table.concat(out, "\n") .. "\n"
end

-- A file of that text in the folder for temporary files; the caller removes it.
function f.write_file(text)
  local path = os.tmpname()
  local file = assert(io.open(path, "wb"))
  assert(file:write(text))
  file:close()
  return path
end

return f
