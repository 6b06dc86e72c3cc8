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

f.signal = { symbol_rate = ls.gbd(53.125), levels = 4 }
f.criteria = { notch_over_nyquist = 2, added_loss_db = 0.5 }
f.capability = { depth_tolerance = ls.um(50), cut_clearance = ls.um(75), residual_min = ls.um(125),
  residual_target = ls.um(200), bit_oversize = ls.um(200), wall_clearance = ls.um(100), aspect_ratio = 12 }

return f
