-- Networks: tests/data/networks.csv (tests/tools/make_network_table.py: scikit-rf, NumPy), identities, and what is refused.
package.path = (arg[0]:match("^.*/") or "./") .. "?.lua;" .. package.path
local t = require "harness"
local ls = require "libstub"

local function numbers(line)
  local list = {}
  for text in line:gmatch(",([^,]+)") do list[#list + 1] = assert(tonumber(text), line) end
  return list
end

-- The table's cases: { f = name, p = ports, s = numbers, ... }.
local cases = {}
for line in assert(io.open(t.dir .. "../data/networks.csv")):lines() do
  local key = line:match("^[%w_]+")
  if key == "case" then
    local f, p = line:match("^case,([%w_]+),(%d+)")
    cases[#cases + 1] = { f = f, p = math.tointeger(tonumber(p)) }
  elseif key then
    cases[#cases][key] = numbers(line)
  end
end

local kinds = { "S", "Z", "Y", "ABCD", "G", "H" }
local run = {}
local function net(c, key) return ls.complex(c[key], c.p) end
function run.renormalise(c) return ls.renormalise(net(c, "s"), c.z_from, c.z_to) end
function run.renormalise_complex(c)
  return ls.renormalise_complex(net(c, "s"), ls.complex(c.z_from), ls.complex(c.z_to))
end
function run.convert(c)
  return ls.convert(net(c, "s"), kinds[math.tointeger(c.kinds[1])], kinds[math.tointeger(c.kinds[2])], c.z)
end
function run.cascade(c) return ls.cascade(net(c, "a"), net(c, "b")) end
function run.deembed_left(c) return ls.deembed(net(c, "a"), net(c, "b")) end
function run.deembed_right(c) return ls.deembed(net(c, "a"), nil, net(c, "b")) end
function run.shunt(c) return ls.shunt(ls.complex(c.zin), c.z[1]) end
function run.passivity(c) return ls.passivity(net(c, "s")) end
function run.reciprocity(c) return ls.reciprocity(net(c, "s")) end
function run.mixed(c)
  local pairs_of = {}
  for i = 1, #(c.pairs or {}), 2 do
    pairs_of[#pairs_of + 1] = { math.tointeger(c.pairs[i]) + 1, math.tointeger(c.pairs[i + 1]) + 1 }
  end
  local s = net(c, "s")
  local mixed, z = ls.to_mixed(s, pairs_of, c.z)
  for i, want in ipairs(c.z_mixed) do t.close(z[i], want, 1e-14) end
  local back = ls.to_single(mixed, pairs_of, c.z):interleaved()
  for i, want in ipairs(c.s) do t.close(back[i], want, 0, 1e-13) end
  return mixed
end

local count = {}
for _, c in ipairs(cases) do
  if run[c.f] then
    local out = assert(run[c.f](c))
    local got, largest = out.interleaved and out:interleaved() or out, 0
    for _, want in ipairs(c.want) do largest = math.max(largest, math.abs(want)) end
    t.equal(#got, #c.want)
    for i, want in ipairs(c.want) do t.close(got[i], want, 0, 1e-12 * largest, c.f) end
    count[c.f] = (count[c.f] or 0) + 1
  end
end
for f, least in pairs { renormalise = 6, renormalise_complex = 6, convert = 72, cascade = 4, deembed_left = 2, deembed_right = 2,
  shunt = 10, mixed = 8, passivity = 7, reciprocity = 5 } do
  t.check((count[f] or 0) >= least, f)
end

-- Several frequencies are each alone; a through changes nothing; what was put on comes off again.
local random = (function()
  local state = 1
  return function()
    state = (state * 16807) % 2147483647
    return state / 2147483647 - 0.5
  end
end)()
local function random_net(n, p)
  local list = {}
  for i = 1, 2 * n * p * p do list[i] = random() end
  return ls.complex(list, p)
end
local function same(a, b, room)
  a, b = a:interleaved(), b:interleaved()
  t.equal(#a, #b)
  for i = 1, #a do t.close(a[i], b[i], 0, room) end
end
local a, b, c = random_net(3, 4), random_net(3, 4), random_net(3, 4)
local abc = ls.cascade(ls.cascade(a, b), c)
same(abc, ls.cascade(a, ls.cascade(b, c)), 1e-12)
same(ls.deembed(abc, a, c), b, 1e-10)
same(ls.deembed(b), b, 0)
t.equal(ls.cascade(a, b):re(2, 3, 1), ls.cascade(ls.complex({ table.unpack(a:interleaved():totable(), 33, 64) }, 4),
  ls.complex({ table.unpack(b:interleaved():totable(), 33, 64) }, 4)):re(1, 3, 1))
same(ls.renormalise(ls.renormalise(a, 50, { 75, 75, 100, 30 }), { 75, 75, 100, 30 }, 50), a, 1e-13)
same(ls.convert(ls.convert(a, "S", "Y"), "Y", "S"), a, 1e-12)
same(ls.convert(a, "S", "Z"), ls.convert(a, "S", "Z", 50), 0)
same(ls.port_map(ls.port_map(a, { 3, 1, 4, 2 }), { 2, 4, 1, 3 }), a, 0)
local part = ls.port_map(a, { 4, 2 })
t.equal(part:ports(), 2)
t.equal(part:re(3, 1, 2), a:re(3, 4, 2))
do -- the stub of a model as a network: the model's own S21
  local fixture = require "fixture"
  local model = fixture.via(fixture.stackup()):model { fidelity = "ladder" }
  local freq = ls.linspace(1e9, 30e9, 7)
  local zin, s21 = model:zin(freq), model:s21(freq)
  local s = ls.shunt(zin)
  for k = 1, 7 do
    t.close(s:re(k, 2, 1), s21:re(k), 1e-12)
    t.close(s:im(k, 2, 1), s21:im(k), 1e-12)
    t.check(s:re(k, 1, 2) == s:re(k, 2, 1))
  end
  for _, sigma in ipairs(ls.passivity(s):totable()) do t.check(sigma <= 1 + 1e-12) end
  for _, difference in ipairs(ls.reciprocity(s):totable()) do t.equal(difference, 0.0) end
end
t.equal(#ls.cascade(ls.complex({}, 2), ls.complex({}, 2)), 0)

-- Frequencies that fail hold NaN and their status; the others are as they are alone.
do
  local spoiled = a:interleaved()
  spoiled[32 + 5] = 0 / 0
  local out, message, code, status = ls.renormalise(ls.complex(spoiled, 4), 50, 75)
  t.equal(code, ls.E_ARGUMENT)
  t.check(message:find("item 2: s[2, 1, 3] = ", 1, true), message)
  t.equal(table.concat(status, " "), "0 -1 0")
  t.check(out:re(2, 1, 1) ~= out:re(2, 1, 1))
  t.equal(out:re(3, 2, 1), ls.renormalise(a, 50, 75):re(3, 2, 1))
  local sigma, _, code2, status2 = ls.passivity(ls.complex(spoiled, 4))
  t.check(sigma[2] ~= sigma[2] and sigma[1] == ls.passivity(a)[1] and code2 == ls.E_ARGUMENT and status2[2] == ls.E_ARGUMENT)
  local mixed, z, message3, code3, status3 = ls.to_mixed(ls.complex(spoiled, 4), { { 1, 2 } })
  t.check(#mixed == 3 and #z == 4 and message3 and code3 == ls.E_ARGUMENT and status3[2] == ls.E_ARGUMENT)
end
-- No frequency came out: nil, message, code. A through has no Z.
local through = ls.complex({ 0, 0, 1, 0, 1, 0, 0, 0 }, 2)
t.fails("singular", ls.E_NONE, ls.convert(through, "S", "Z"))
t.fails("singular", ls.E_NONE, ls.deembed(through, ls.complex({ 1, 0, 0, 0, 0, 0, 1, 0 }, 2)))
t.fails("item 1: s[1, 1, 2] = ", ls.E_ARGUMENT, ls.renormalise(ls.complex({ 0, 0, math.huge, 0, 1, 0, 0, 0 }, 2), 50, 75))
t.fails("zin[1] = ", ls.E_ARGUMENT, ls.shunt(ls.complex { 0 / 0, 0 }))
t.check(ls.shunt(ls.complex { math.huge, 0 }):re(1, 2, 1) == 1.0)

-- What concerns all of them.
t.fails("port 2: z_from = -50 ohm", ls.E_ARGUMENT, ls.renormalise(through, { 50, -50 }, 75))
t.fails("port 1: z_to = 0 ohm", ls.E_ARGUMENT, ls.renormalise(through, 50, 0))
t.fails("z_ref = -1 ohm", ls.E_ARGUMENT, ls.shunt(ls.complex { 1, 0 }, -1))
t.fails("p = 3 ports: must be >= 1 and <= 16, and even", ls.E_ARGUMENT, ls.cascade(random_net(1, 3), random_net(1, 3)))
t.fails("p = 4 ports: must be 2 for 'G' and 'H'", ls.E_ARGUMENT, ls.convert(a, "S", "G"))
t.fails("pairs[2]: port 5: must be 1 to 4", ls.E_ARGUMENT, ls.to_mixed(a, { { 1, 2 }, { 3, 5 } }))
t.fails("pairs[2]: port 2: must stand in one place only", ls.E_ARGUMENT, ls.to_single(a, { { 1, 2 }, { 3, 2 } }))
t.fails("map[1]: port 0: must be 1 to 4", ls.E_ARGUMENT, ls.port_map(a, { 0 }))
t.fails("map[3]: port 1: must stand in one place only", ls.E_ARGUMENT, ls.port_map(a, { 1, 2, 1 }))
t.fails("map: 5 ports: must be 1 to 4", ls.E_ARGUMENT, ls.port_map(a, { 1, 2, 3, 4, 5 }))
t.fails("map: 0 ports", ls.E_ARGUMENT, ls.port_map(a, {}))

-- Wrong calls.
t.raises("libstub.complex expected, got table", ls.renormalise, {}, 50, 75)
t.raises("value expected", ls.renormalise, a, 50)
t.raises("z_to: 2 numbers, 4 needed", ls.renormalise, a, 50, { 50, 50 })
t.raises("list of numbers or libstub.array expected, got string", ls.renormalise, a, "50", 75)
t.raises("z_from: a list of 12 values needed", ls.renormalise_complex, a, a, a)
t.raises("libstub.complex expected, got number", ls.renormalise_complex, a, 50, 75)
t.raises("'s' is not one of: S, Z, Y, ABCD, G, H", ls.convert, a, "s", "Z")
t.raises("string expected, got number", ls.convert, a, "S", 2)
t.raises("3 matrices of 4 ports beside 1 of 2", ls.cascade, through, a)
t.raises("libstub.complex expected, got nil", ls.cascade, a, nil)
t.raises("beside 3 of 4", ls.deembed, a, nil, through)
t.raises("a list of impedances needed", ls.shunt, a)
t.raises("pairs[1]: table expected, got number", ls.to_mixed, a, { 1, 2 })
t.raises("pairs[1]: { positive, negative } expected, got 3 items", ls.to_mixed, a, { { 1, 2, 3 } })
t.raises("pairs[1]: integer expected, got 1.5", ls.to_mixed, a, { { 1.5, 2 } })
t.raises("pairs[1]: number of a port expected, got string", ls.to_mixed, a, { { "1", 2 } })
t.raises("map[2]: number of a port expected, got boolean", ls.port_map, a, { 1, true })
t.raises("table expected, got number", ls.port_map, a, 1)
t.raises("unexpected argument", ls.passivity, a, 1)

t.done()
