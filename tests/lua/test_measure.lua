-- Measured curves: notches found in real channels, and what is fitted to them.
package.path = (arg[0]:match("^.*/") or "./") .. "?.lua;" .. package.path
local t = require "harness"
local ls = require "libstub"
local fixture = require "fixture"

local function load_csv(name)
  local freq, list = {}, {}
  for line in assert(io.open(t.dir .. "../data/channels/" .. name)):lines() do
    local f, re, im = line:match("^([%d.e+-]+),([%d.e+-]+),([%d.e+-]+)$")
    if f then
      freq[#freq + 1] = tonumber(f)
      list[#list + 1], list[#list + 2] = tonumber(re), tonumber(im)
    end
  end
  return ls.array(freq), ls.complex(list)
end

-- The channels' own README: 7.16 GHz, -49.4 dB in averages over 0.5 GHz; none in the control.
local freq, s = load_csv "backplane_long_stub_sdd21.csv"
t.equal(#s, 1496)
local notches, averaged, trend = ls.find_notches(freq, s, { window = 0.5e9 })
t.equal(select("#", ls.find_notches(freq, s, { window = 0.5e9 })), 3)
t.equal(#notches, 1)
local notch = notches[1]
t.close(notch.f_minimum, 7.16e9, 0, 0.0101e9)
t.close(notch.level_db, -49.4, 0, 0.05)
t.close(notch.f, 7.16e9, 0, 2 * notch.f_sigma)
t.equal(#notch.quality, 0)
t.check(notch.depth_db < -15 and notch.score > 8 and notch.width > 0 and notch.impedance > 0 and notch.q > 0)
t.equal(notch.window, 0.5e9)
t.check(#averaged == 1496 and #trend == 1496)
local at
for i = 1, #freq do if freq[i] == 10e9 then at = i end end
t.close(averaged[at], -39.5, 0, 0.1)
local found = ls.find_notches(freq, s)
t.close(found[1].f, notch.f, 0, notch.f_sigma)
local part, off = ls.find_notches(freq, s, { f_high = 6.5e9, window = 0.25e9 })
t.equal(#part, 0)
t.check(off[#freq] ~= off[#freq] and off[1] == off[1])
local control_freq, control = load_csv "backplane_control_sdd21.csv"
t.equal(#ls.find_notches(control_freq, control), 0)
t.check(#ls.find_notches(freq, s, { window = 0.5e9, depth_least = 40 }) == 0)

-- The same element of a network.
do
  local list = {}
  for k = 1, #s do
    local re, im = s:get(k)
    for _, x in ipairs { 0, 0, 1, 0, re, im, 0, 0 } do list[#list + 1] = x end
  end
  local matrices = ls.complex(list, 2)
  local same = ls.find_notches(freq, matrices, { window = 0.5e9, to = 2, from = 1 })
  t.equal(same[1].f, notch.f)
  t.equal(#ls.find_notches(freq, matrices, { to = 1, from = 2 }), 0)
  t.raises("'to' and 'from' must say which element", ls.find_notches, freq, matrices)
  t.raises("'to' and 'from' must say which element", ls.find_notches, freq, matrices, { to = 2 })
  t.fails("to = 3: must be 1 to 2", ls.E_ARGUMENT, ls.find_notches(freq, matrices, { to = 3, from = 1 }))
end

-- A model's stub in a channel without loss, shallow or cut off by the band: quality says so.
local board = fixture.stackup()
local model = fixture.via(board):model { fidelity = "ladder" }
local stub = model:notches(ls.ghz(60))[1]
do
  local f = ls.linspace(1e8, 1.8 * stub.f, 1500)
  local seen = ls.find_notches(f, model:s21(f))
  t.equal(#seen, 1)
  t.close(seen[1].f, stub.f, 0.01)
end

-- Dk and length with their errors, to first order.
local dk, sigma = ls.fit_effective_dk(12e9, 0.12e9, 3e-3, 3e-5, 1)
t.close(dk, ls.quarter_wave_dk(12e9, 3e-3, 1), 1e-15)
t.close(sigma, 2 * dk * math.sqrt(0.01 ^ 2 + 0.01 ^ 2), 1e-12)
local length, length_sigma = ls.fit_length { f = 12e9, f_sigma = 0.12e9, dk = dk, dk_sigma = 0.02 * dk, n = 1 }
t.close(length, 3e-3, 1e-12)
t.close(length_sigma, length * math.sqrt(0.01 ^ 2 + 0.01 ^ 2), 1e-12)
t.fails("f_sigma = -1 Hz", ls.E_ARGUMENT, ls.fit_length(12e9, -1, 4, 0, 1))
t.equal(select(4, ls.fit_effective_dk(74e9, 0, 2e-3, 0, 1)), ls.W_RANGE)

-- A fit of what the prediction itself gives finds it again; count of calls and order are the library's.
local lengths = { 1e-3, 2e-3, 3.5e-3, 5e-3 }
local function predict(ratio, offset, coupon)
  return 299792458.0 / (4 * (lengths[coupon] + offset) * math.sqrt(3.5 * ratio))
end
local f, f_sigma = {}, {}
for i = 1, 4 do f[i], f_sigma[i] = predict(1.13, 20e-6, i), 1e7 end
local fit, residuals = assert(ls.fit_in_plane_dk(predict, f, f_sigma, { with_offset = true }))
t.close(fit.ratio, 1.13, 1e-7)
t.close(fit.offset, 20e-6, 1e-5)
t.check(fit.describes and fit.dof == 2 and fit.chi2 < 1e-6 and fit.ratio_low < 1.13 and fit.ratio_high > 1.13 and fit.offset_sigma > 0)
t.check(#residuals == 4 and math.abs(residuals[1]) < 1e4)
t.equal(select("#", ls.fit_in_plane_dk(predict, f, f_sigma, { with_offset = true })), 2)
local bare = ls.fit_in_plane_dk(predict, ls.array(f), ls.array(f_sigma))
t.check(bare.offset == nil and bare.offset_low == nil and bare.dof == 3 and not bare.describes)

-- The prediction's own failures.
t.fails("no such coupon", ls.E_NONE, ls.fit_in_plane_dk(function() return nil, "no such coupon", ls.E_NONE end, f, f_sigma))
t.fails("too wide", ls.E_GEOMETRY, ls.fit_in_plane_dk(function() return nil, "too wide", ls.E_GEOMETRY end, f, f_sigma))
t.raises("lost", ls.fit_in_plane_dk, function() error "lost" end, f, f_sigma)
t.raises("the prediction must be a number", ls.fit_in_plane_dk, function() return "1e9" end, f, f_sigma)
t.raises("the prediction must be a number, or nil, message, code", ls.fit_in_plane_dk, function() end, f, f_sigma)
t.raises("attempt to yield", ls.fit_in_plane_dk, function() coroutine.yield() end, f, f_sigma)
t.fails("coupon 1: no notch predicted", ls.E_NONE, ls.fit_in_plane_dk(function() return 0 / 0 end, f, f_sigma))
t.fails("do not depend on the in-plane ratio", ls.E_GEOMETRY, ls.fit_in_plane_dk(function() return 1e10 end, f, f_sigma))
t.fails("coupon 2: f = -1 Hz", ls.E_ARGUMENT, ls.fit_in_plane_dk(predict, { 1e10, -1, 1e10, 1e10 }, f_sigma))
t.fails("coupon 3: f_sigma = 0 Hz", ls.E_ARGUMENT, ls.fit_in_plane_dk(predict, f, { 1e7, 1e7, 0, 1e7 }))
t.fails("ratio = 2: the best lies at or beyond", ls.E_NONE, ls.fit_in_plane_dk(function(ratio, offset, i)
  return predict(ratio / 2, offset, i)
end, f, f_sigma))
do -- lists that change meanwhile do not reach the library
  local mine = ls.array(f)
  local calls = 0
  local changed = assert(ls.fit_in_plane_dk(function(...)
    calls = calls + 1
    mine[1] = -1
    return predict(...)
  end, mine, f_sigma, { with_offset = true }))
  t.check(calls > 8 and changed.ratio == fit.ratio)
end

-- Coupons: the model's own notches with another in-plane Dk, which comes back into a stackup.
do
  local quick = { fidelity = "ladder" }
  local stackup = board:with_in_plane_ratio(1.0)
  local truth = board:with_in_plane_ratio(1.17)
  local vias, first, sigma_of = {}, {}, {}
  for i, exit in ipairs { "GND1", "SIG1", "GND2" } do
    local change = { connects = { "TOP", exit } }
    vias[i] = fixture.via(stackup, change)
    first[i], sigma_of[i] = fixture.via(truth, change):model(quick):notches(ls.ghz(100))[1].f, 1e7
  end
  local coupons, rest, fitted = assert(ls.fit_coupons(stackup, vias, first, sigma_of, quick))
  t.close(coupons.ratio, 1.17, 1e-5)
  t.check(#rest == 3 and coupons.dof == 2 and coupons.offset == nil)
  t.close(fitted:layer("R1").in_plane_ratio, coupons.ratio, 1e-12)
  t.equal(fitted:find("GND2"), 7)
  t.close(fitted:layer("R4").thickness, 400e-6, 1e-15)
  local both = ls.fit_coupons(stackup, vias, first, sigma_of, { fidelity = "ladder", with_offset = true })
  t.check(math.abs(both.offset) < 1e-6 and both.dof == 1)
  t.raises("f: 2 numbers, 3 needed", ls.fit_coupons, stackup, vias, { 1e9, 2e9 }, sigma_of)
  t.raises("vias[1]: made on another stackup", ls.fit_coupons, board, vias, first, sigma_of)
  t.raises("unknown key 'offset'; allowed: with_offset, fidelity", ls.fit_coupons, stackup, vias, first, sigma_of, { offset = true })
  t.fails("coupon 2: f_sigma = -1 Hz", ls.E_ARGUMENT, ls.fit_coupons(stackup, vias, first, { 1e7, -1, 1e7 }, quick))
  t.fails("count = 0 coupons", ls.E_ARGUMENT, ls.fit_coupons(stackup, {}, {}, {}))
end

-- Refused searches.
t.fails("n = 3 frequencies", ls.E_ARGUMENT, ls.find_notches({ 1e9, 2e9, 3e9 }, ls.complex { 1, 0, 1, 0, 1, 0 }))
t.fails("depth_least = 0.5 dB", ls.E_ARGUMENT, ls.find_notches(freq, s, { depth_least = 0.5 }))
t.fails("f_high = 1e+09 Hz: must be > f_low", ls.E_GEOMETRY, ls.find_notches(freq, s, { f_high = 1e9, f_low = 2e9 }))
do
  local f2, list = ls.array(freq), s:interleaved()
  f2[5] = f2[4]
  t.fails("item 5: freq", ls.E_ARGUMENT, ls.find_notches(f2, s))
  list[2 * 7 - 1] = 0 / 0
  t.fails("item 7: s = ", ls.E_ARGUMENT, ls.find_notches(freq, ls.complex(list)))
end
t.raises("freq: 1 numbers, 1496 needed", ls.find_notches, { 1 }, s)
t.raises("unknown key 'depth'; allowed: window, f_low, f_high, depth_least, to, from", ls.find_notches, freq, s, { depth = 1 })
t.raises("function expected, got table", ls.fit_in_plane_dk, {}, f, f_sigma)
t.raises("f_sigma: 1 numbers, 4 needed", ls.fit_in_plane_dk, predict, f, { 1 })
t.raises("with_offset: boolean expected, got number", ls.fit_in_plane_dk, predict, f, f_sigma, { with_offset = 1 })

t.done()
