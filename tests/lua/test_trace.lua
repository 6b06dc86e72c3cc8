-- Traces and conductors: the lines, what is refused. Their values from outside are in check_values.lua and in the C tests.
package.path = (arg[0]:match("^.*/") or "./") .. "?.lua;" .. package.path
local t = require "harness"
local ls = require "libstub"

local c0, mu0, eta0 = 299792458.0, 4e-7 * math.pi, 4e-7 * math.pi * 299792458.0

-- Skin depth, and the impedance of smooth copper, which is (1 + j)/(conductivity depth).
t.close(ls.skin_depth(5.8e7, 1e9), math.sqrt(1 / (math.pi * 1e9 * mu0 * 5.8e7)), 1e-9)
t.equal(ls.skin_depth { f = 1e9, conductivity = 5.8e7 }, ls.skin_depth(5.8e7, 1e9))
local freq = { 1e8, 1e9, 1e10 }
local smooth = assert(ls.conductor_surface_impedance({}, freq))
for i, f in ipairs(freq) do
  local re, im = smooth:get(i)
  t.close(re, 1 / (5.8e7 * ls.skin_depth(5.8e7, f)), 1e-12)
  t.close(im, re, 1e-12)
end
do -- rough copper: the published factor of the resistance, or at most that of the spheres
  local rough = { roughness = 1e-6, roughness_law = "hammerstad" }
  local re, im = ls.conductor_surface_impedance(rough, 1e10)
  local k = 1 + 2 / math.pi * math.atan(1.4 * (1e-6 / ls.skin_depth(5.8e7, 1e10)) ^ 2)
  t.close(re / smooth:re(3), k, 1e-9)
  t.check(im >= re)
  rough.roughness_law = "spheres"
  local more = ls.conductor_surface_impedance(rough, ls.array(freq))
  t.check(more:re(3) > smooth:re(3) and more:re(3) < 8.3 * smooth:re(3) and more:re(3) ~= re)
  t.equal(select("#", ls.conductor_surface_impedance(rough, 1e9)), 2)
end

-- A stripline sheet without loss: its delay is that of the dielectric, its impedance falls with width; a microstrip is faster
-- than its dielectric.
local resin = { dk = 4 }
local function stripline(change)
  local s = { kind = "stripline", width = 0.1e-3, height_below = 0.15e-3, height_above = 0.15e-3, dielectric_below = resin }
  for key, value in pairs(change or {}) do s[key] = value end
  return s
end
local z, gamma = ls.trace_line(stripline(), freq)
t.equal(#z, 3)
for i, f in ipairs(freq) do
  t.close(gamma:im(i), 2 * math.pi * f * 2 / c0, 1e-9)
  t.check(math.abs(gamma:re(i)) < 1e-9 * gamma:im(i))
  t.close(z:re(i), z:re(1), 1e-9)
end
do -- very wide: plate capacitance and the two fringes of a thin strip (Cohn 1954): Z = eta0/(4 (w/b + 2 ln 2/pi) sqrt(Dk))
  local wide = ls.trace_line(stripline { width = 3e-3 }, 1e9)
  t.close(wide, eta0 / (4 * 2 * (3 / 0.3 + 2 * math.log(2) / math.pi)), 1e-9)
end
local zr, zi, gr, gi = ls.trace_line(stripline(), 1e9)
t.check(zr == z:re(2) and zi == z:im(2) and gr == gamma:re(2) and gi == gamma:im(2))
t.equal(select("#", ls.trace_line(stripline(), freq)), 2)
local lossy = stripline { thickness = 15e-6, dielectric_above = { dk = 3.8, loss_tangent = 0.01 }, conductor = { roughness = 1e-6 } }
local z2, gamma2 = ls.trace_line(lossy, freq)
t.check(gamma2:re(3) > gamma2:re(2) and gamma2:re(2) > gamma2:re(1) and gamma2:re(1) > 0)
t.check(z2:re(3) < z:re(3))
local microstrip = { kind = "microstrip", width = 0.2e-3, height_below = 0.1e-3, dielectric_below = resin }
local _, _, _, quick = ls.trace_line(microstrip, 1e9)
t.check(quick > 2 * math.pi * 1e9 / c0 and quick < 2 * math.pi * 1e9 * 2 / c0)
microstrip.no_dispersion = true
local _, _, _, low = ls.trace_line(microstrip, 5e10)
microstrip.no_dispersion = false
local _, _, _, high = ls.trace_line(microstrip, 5e10)
t.check(high > low)

-- Warnings follow the results; failures and wrong tables.
do
  local a, b, message, code = ls.trace_line(stripline { thickness = 0.2e-3 }, freq)
  t.check(#a == 3 and #b == 3 and type(message) == "string")
  t.equal(code, ls.W_RANGE)
  t.equal(select("#", ls.trace_line(stripline { thickness = 0.2e-3 }, 1e9)), 6)
end
t.fails("width = -1 m", ls.E_ARGUMENT, ls.trace_line(stripline { width = -1 }, 1e9))
t.fails("height_above = 0 m", ls.E_ARGUMENT, ls.trace_line(stripline { height_above = 0 }, 1e9))
t.fails("dielectric_below: dk = 0.5", ls.E_ARGUMENT, ls.trace_line(stripline { dielectric_below = { dk = 0.5 } }, 1e9))
t.fails("item 2: freq = 0 Hz", ls.E_ARGUMENT, ls.trace_line(stripline(), { 1e9, 0 }))
t.fails("conductivity = 1 S/m", ls.E_ARGUMENT, ls.conductor_surface_impedance({ conductivity = 1 }, 1e9))
t.fails("item 3", ls.E_ARGUMENT, ls.conductor_surface_impedance({}, { 1e9, 2e9, 0 / 0 }))
t.fails("f = -1 Hz", ls.E_ARGUMENT, ls.skin_depth(5.8e7, -1))
t.raises("missing key 'kind'", ls.trace_line, {}, 1e9)
t.raises("missing key 'dielectric_below'", ls.trace_line, { kind = "stripline", width = 1e-4, height_below = 1e-4 }, 1e9)
t.raises("kind: 'coax' is not one of: microstrip, stripline", ls.trace_line, stripline { kind = "coax" }, 1e9)
t.raises("dielectric_below.dk: number expected, got string", ls.trace_line, stripline { dielectric_below = { dk = "4" } }, 1e9)
t.raises("dielectric_above: missing key 'dk'", ls.trace_line, stripline { dielectric_above = {} }, 1e9)
t.raises("conductor: unknown key 'rough'; allowed: conductivity, roughness, roughness_law", ls.trace_line,
  stripline { conductor = { rough = 1 } }, 1e9)
t.raises("conductor.roughness_law: string expected, got number", ls.trace_line, stripline { conductor = { roughness_law = 1 } }, 1e9)
t.raises("no_dispersion: boolean expected, got number", ls.trace_line, stripline { no_dispersion = 1 }, 1e9)
t.raises("unknown key 'dk'; allowed: kind, width", ls.trace_line, { dk = 4 }, 1e9)
t.raises("list of numbers or libstub.array expected, got no value", ls.trace_line, stripline())
t.raises("unexpected argument", ls.trace_line, stripline(), 1e9, 1)
t.raises("table expected, got nil", ls.conductor_surface_impedance, nil, 1e9)

t.done()
