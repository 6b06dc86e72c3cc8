-- Formulas: positional and named, results, failures, wrong calls. Their values are in check_values.lua.
package.path = (arg[0]:match("^.*/") or "./") .. "?.lua;" .. package.path
local t = require "harness"
local ls = require "libstub"

-- Both ways of calling give the same bits, and every result.
local c, l, z = ls.coax(0.25e-3, 0.75e-3, 4)
local c2, l2, z2 = ls.coax { dk = 4, inner_diameter = 0.25e-3, outer_diameter = 0.75e-3 }
t.check(c == c2 and l == l2 and z == z2)
t.close(l / c, z * z, 1e-14)
t.equal(select("#", ls.coax(0.25e-3, 0.75e-3, 4)), 3)
t.equal(select("#", ls.twin_rod(0.7e-3, 1.5e-3, 3.6)), 2)
t.equal(ls.quarter_wave_frequency(1e-3, 4, 3), ls.quarter_wave_frequency { length = 1e-3, dk = 4, n = 3 })
t.equal(ls.quarter_wave_frequency(1, 4, 1.0), ls.quarter_wave_frequency(1, 4, 1), "1.0 is an integer in Lua")
t.close(ls.quarter_wave_length(ls.quarter_wave_frequency(1e-3, 4, 1), 4, 1), 1e-3, 1e-15)

-- A warning follows the result.
local dk, message, code = ls.quarter_wave_dk(74e9, 2e-3, 1)
t.check(dk < 1)
t.check(message:find("faster than light", 1, true))
t.equal(code, ls.W_RANGE)
t.equal(select("#", ls.quarter_wave_dk(30e9, 1e-3, 1)), 1)

-- What a correct program can meet comes back.
t.fails("length = -1 m: must be > 0", ls.E_ARGUMENT, ls.quarter_wave_frequency(-1, 4, 1))
t.fails("length = 0 m", ls.E_ARGUMENT, ls.quarter_wave_frequency(0, 4, 1))
t.fails("nan m: must be > 0", ls.E_ARGUMENT, ls.quarter_wave_frequency(0 / 0, 4, 1))
t.fails("length = inf", ls.E_ARGUMENT, ls.quarter_wave_frequency(math.huge, 4, 1))
t.fails("n = 2: must be odd", ls.E_ARGUMENT, ls.quarter_wave_frequency(1e-3, 4, 2))
t.fails("outer_diameter = 0.001 m: must be > inner_diameter", ls.E_GEOMETRY, ls.coax(2e-3, 1e-3, 4))
t.fails("touch", ls.E_GEOMETRY, ls.return_inductance { drill = 1e-3, count = 4, distance = 0.9e-3, return_drill = 1e-3 })

-- Wrong calls are raised.
t.raises("#2 to", ls.quarter_wave_frequency, 1e-3)
t.raises("number expected, got string", ls.quarter_wave_frequency, 1e-3, "4", 1)
t.raises("unexpected argument", ls.quarter_wave_frequency, 1e-3, 4, 1, 1)
t.raises("no integer representation", ls.quarter_wave_frequency, 1e-3, 4, 1.5)
t.raises("32-bit", ls.quarter_wave_frequency, 1e-3, 4, 2 ^ 40)
t.raises("missing key 'n'", ls.quarter_wave_frequency, { length = 1, dk = 4 })
t.raises("unknown key 'lenght'; allowed: length, dk, n", ls.quarter_wave_frequency, { lenght = 1, dk = 4, n = 1 })
t.raises("unknown key 1; allowed: length, dk, n", ls.quarter_wave_frequency, { 1e-3, 4, 1 })
t.raises("dk: number expected, got string", ls.quarter_wave_frequency, { length = 1, dk = "4", n = 1 })
t.raises("n: integer expected, got 1.5", ls.quarter_wave_frequency, { length = 1, dk = 4, n = 1.5 })
t.raises("n: integer expected, got 1e+20", ls.quarter_wave_frequency, { length = 1, dk = 4, n = 1e20 })
t.raises("unexpected argument", ls.coax, { inner_diameter = 1, outer_diameter = 2, dk = 3 }, 4)

-- Permittivity: lists, arrays and one frequency agree.
local resin = { dk = 4.2, loss_tangent = 0.02, in_plane_ratio = 1.1 }
local through, in_plane = ls.dielectric_permittivity(resin, { 1e8, 1e9, 1e10 })
local through2 = ls.dielectric_permittivity(resin, ls.array { 1e8, 1e9, 1e10 })
t.equal(#through, 3)
for i = 1, 3 do
  t.check(through:re(i) == through2:re(i) and through:im(i) == through2:im(i))
  t.close(in_plane:re(i), 1.1 * through:re(i), 1e-14)
  t.check(through:im(i) < 0)
end
local a, b, c4, d = ls.dielectric_permittivity(resin, 1e10)
t.check(a == through:re(3) and b == through:im(3) and c4 == in_plane:re(3) and d == in_plane:im(3))
t.equal(#ls.dielectric_permittivity(resin, {}), 0)
t.fails("item 2", ls.E_ARGUMENT, ls.dielectric_permittivity(resin, { 1e9, 0 }))
t.fails("dk = 0.5", ls.E_ARGUMENT, ls.dielectric_permittivity({ dk = 0.5 }, 1e9))
t.raises("missing key 'dk'", ls.dielectric_permittivity, {}, 1e9)
t.raises("item 2: number expected, got string", ls.dielectric_permittivity, resin, { 1e9, "2e9" })
t.raises("list of numbers or libstub.array expected, got boolean", ls.dielectric_permittivity, resin, true)

t.done()
