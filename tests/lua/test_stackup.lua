-- Stackups: what they answer, what they refuse.
package.path = (arg[0]:match("^.*/") or "./") .. "?.lua;" .. package.path
local t = require "harness"
local ls = require "libstub"
local fixture = require "fixture"

local board = fixture.stackup()
t.equal(#board, 15)
t.equal(board:count(), 15)
t.equal(board:copper_count(), 8)
t.equal(board:find("TOP"), 1)
t.equal(board:find("SIG1"), 5)
t.equal(board:copper(3), 5)
t.equal(board:copper(8), 15)
t.equal(tostring(board), "libstub.stackup: 15 layers, 8 of copper, 1.6 mm")

-- Depths, by name and by number.
local top, bottom = board:depth("GND1")
t.close(top, 130e-6, 1e-14)
t.close(bottom, 160e-6, 1e-14)
t.equal(select(1, board:depth(3)), top)
t.close(select(2, board:depth("BOTTOM")), 1.6e-3, 1e-14)

-- Layers come back with the defaults filled in, and make the same stackup again.
local layer = board:layer("R1")
t.equal(layer.kind, "dielectric")
t.equal(layer.dk, 3.6)
t.equal(layer.f_ref, 1e10)
t.equal(layer.conductivity, nil)
t.equal(board:layer("TOP").conductivity, 5.8e7)
t.equal(board:layer("GND1").dk, 3.6, "resin between the copper: that above")
t.equal(board:layer(3).tol_plus, 3e-6)
local again = assert(ls.stackup(board:layers()))
for i = 1, #board do
  local one, two = board:layer(i), again:layer(i)
  for key, value in pairs(one) do t.equal(two[key], value, key) end
end

local all = board:interval(0, 1.6e-3)
t.close(all.thickness, 1.6e-3, 1e-12)
t.close(all.dk_through_plane, 3.6, 1e-12)
t.close(all.dk_in_plane, 3.96, 1e-12)
t.close(all.loss_tangent, 0.004, 1e-9)
t.close(all.tol_plus, 136e-6 + 3e-6, 1e-9)
t.check(all.tol_rss_plus < all.tol_plus)

-- Copper's roughness and its law; the same board with another in-plane ratio.
do
  local layers = fixture.layers()
  layers[1].roughness, layers[1].roughness_law = 2e-6, "spheres"
  local rough = assert(ls.stackup(layers))
  t.equal(rough:layer(1).roughness, 2e-6)
  t.equal(rough:layer(1).roughness_law, "spheres")
  t.equal(rough:layer(3).roughness_law, "hammerstad")
  t.raises("layers[1].roughness_law: 'flat' is not one of: hammerstad, spheres", ls.stackup, (function()
    layers[1].roughness_law = "flat"
    return layers
  end)())
  local other = assert(rough:with_in_plane_ratio(1.25))
  t.check(other ~= rough and other:find("SIG1") == 5)
  for i = 1, #other do
    local one, two = rough:layer(i), other:layer(i)
    t.equal(two.in_plane_ratio, 1.25)
    one.in_plane_ratio = 1.25
    for key, value in pairs(one) do t.equal(two[key], value, key) end
  end
  t.close(other:interval(0, 1.6e-3).dk_in_plane, 1.25 * 3.6, 1e-12)
  t.fails("ratio = 2.5: must be >= 0.5 and <= 2", ls.E_ARGUMENT, rough:with_in_plane_ratio(2.5))
  t.fails("ratio", ls.E_ARGUMENT, rough:with_in_plane_ratio(0 / 0))
  t.raises("number expected, got string", rough.with_in_plane_ratio, rough, "1")
  t.raises("unexpected argument", rough.with_in_plane_ratio, rough, 1, 2)
end

-- Not there, or outside: nil, message, code.
t.fails("there is no layer 'SIG9'", ls.E_NONE, board:find("SIG9"))
t.fails("there is no layer 'SIG9'", ls.E_NONE, board:layer("SIG9"))
t.fails("layer 16: must be 1 to 15", ls.E_NONE, board:layer(16))
t.fails("layer 0: must be 1 to 15", ls.E_NONE, board:depth(0))
t.fails("layer -1: must be 1 to 15", ls.E_NONE, board:depth(-1))
t.fails("copper layer 9: must be 1 to 8", ls.E_NONE, board:copper(9))
t.fails("bottom", ls.E_GEOMETRY, board:interval(1e-3, 1e-3))
t.fails("must be", ls.E_ARGUMENT, board:interval(0, 1))

-- Copper may be a sheet without thickness.
do
  local layers = fixture.layers()
  layers[7].thickness = 0
  local sheet = assert(ls.stackup(layers))
  t.equal(sheet:layer("GND2").thickness, 0.0)
  local top, bottom = sheet:depth("GND2")
  t.equal(top, bottom)
end

-- Layers in error are named as Lua counts them.
local function with(i, key, value)
  local layers = fixture.layers()
  if key then layers[i][key] = value else layers[i] = value end
  return layers
end
t.fails("layer 7 'GND2': thickness = -0.0001 m: must be >= 0", ls.E_ARGUMENT, ls.stackup(with(7, "thickness", -1e-4)))
t.fails("layer 2 'R1': thickness = 0 m: must be > 0", ls.E_ARGUMENT, ls.stackup(with(2, "thickness", 0)))
t.fails("nan m: must be >= 0", ls.E_ARGUMENT, ls.stackup(with(7, "thickness", 0 / 0)))
t.fails("layer 2 'R1': dk = 0.5", ls.E_ARGUMENT, ls.stackup(with(2, "dk", 0.5)))
t.fails("layer 5 has it too", ls.E_GEOMETRY, ls.stackup(with(11, "name", "SIG1")))
t.fails("layer 5 'SIG1' and layer 6 'R3'", ls.E_GEOMETRY, ls.stackup(with(6, nil, { name = "R3", kind = "plane",
  thickness = 30e-6 })))
t.fails("conductor", ls.E_GEOMETRY, ls.stackup(with(2, "roughness", 1e-6)))
t.fails("name", ls.E_ARGUMENT, ls.stackup(with(1, "name", "")))
t.fails("name", ls.E_ARGUMENT, ls.stackup(with(1, "name", ("x"):rep(200))))
t.fails("count = 0 layers", ls.E_ARGUMENT, ls.stackup {})
t.fails("none of 1 is of copper", ls.E_GEOMETRY, ls.stackup { { name = "R", kind = "dielectric", thickness = 1e-4, dk = 4 } })
-- A name that looks like the library's own numbering is left alone.
t.fails("layer 4 'layer 7'", ls.E_ARGUMENT, ls.stackup((function()
  local layers = with(4, "name", "layer 7")
  layers[4].dk = 0
  return layers
end)()))

-- Wrong tables are raised, with the place.
t.raises("layers[4]: unknown key 'dkk'; allowed: name, kind, thickness", ls.stackup, with(4, "dkk", 4))
t.raises("layers[4].dk: number expected, got string", ls.stackup, with(4, "dk", "4"))
t.raises("layers[4]: missing key 'dk'", ls.stackup, with(4, "dk", nil))
t.raises("layers[3]: missing key 'dk'", ls.stackup, with(3, "loss_tangent", 0.02))
t.raises("layers[4]: missing key 'name'", ls.stackup, with(4, "name", nil))
t.raises("layers[4]: missing key 'thickness'", ls.stackup, with(4, "thickness", nil))
t.raises("layers[4].kind: 'plain' is not one of: dielectric, signal, plane, mixed", ls.stackup, with(4, "kind", "plain"))
t.raises("layers[4].kind: string expected, got number", ls.stackup, with(4, "kind", 3))
t.raises("layers[4].name: string expected, got number", ls.stackup, with(4, "name", 3))
t.raises("layers[4].name: string contains a zero byte", ls.stackup, with(4, "name", "a\0b"))
t.raises("layers[4]: table expected, got string", ls.stackup, with(4, nil, "GND"))
t.raises("table expected, got nil", ls.stackup, nil)
t.raises("unexpected argument", ls.stackup, {}, 1)
t.raises("name or number of a layer expected, got boolean", board.layer, board, true)
t.raises("integer expected, got 1.5", board.layer, board, 1.5)
t.raises("libstub.stackup expected, got table", board.count, {})

t.done()
