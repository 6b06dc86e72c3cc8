-- Networks over time against closed forms, causality, insertion loss deviation against tests/data/networks.csv.
package.path = (arg[0]:match("^.*/") or "./") .. "?.lua;" .. package.path
local t = require "harness"
local ls = require "libstub"

local pi = math.pi
local freq = ls.linspace(0, 100e9, 2001)
-- A one-port from f -> re, im.
local function one_port(h)
  local list = {}
  for k = 1, #freq do list[2 * k - 1], list[2 * k] = h(freq[k]) end
  return ls.complex(list)
end

-- A matched line of two ports: the step comes `delay` later, nothing comes back.
local delay, rise = 0.7e-9, 40e-12
local line = (function()
  local list = {}
  for k = 1, #freq do
    local re, im = math.cos(2 * pi * freq[k] * delay), -math.sin(2 * pi * freq[k] * delay)
    for _, x in ipairs { 0, 0, re, im, re, im, 0, 0 } do list[#list + 1] = x end
  end
  return ls.complex(list, 2)
end)()
local times = ls.linspace(-0.2e-9, 1.6e-9, 19)
-- The integrated Gaussian of that rise time, summed up.
local function edge(at)
  local sigma, sum, n = rise / 1.6832424671458286, 0, 4000
  if at < -8 * sigma then return 0 end
  local x0, x1 = -8 * sigma, math.min(at, 8 * sigma)
  for i = 0, n - 1 do
    local x = x0 + (i + 0.5) * (x1 - x0) / n
    sum = sum + math.exp(-0.5 * (x / sigma) ^ 2)
  end
  return sum * (x1 - x0) / n / (sigma * math.sqrt(2 * pi))
end
local step = assert(ls.step_response(freq, line, times, { rise_time = rise }))
t.equal(#step, 19)
for i = 1, 19 do t.close(step[i], edge(times[i] - delay), 0, 1e-6) end
local back = ls.step_response(freq, line, times, { rise_time = rise, to = 1, from = 1 })
for i = 1, 19 do t.close(back[i], 0, 0, 1e-12) end
t.equal(ls.step_response(freq, line:element(2, 1), times, { rise_time = rise })[9], step[9])
t.equal(#ls.step_response(freq, line, {}, { rise_time = rise }), 0)

-- 50 ohm that ends in 75 ohm after 0.15 ns.
local trip, gamma = 0.15e-9, (75 - 50) / (75 + 50)
local reflection = one_port(function(f) return gamma * math.cos(4 * pi * f * trip), -gamma * math.sin(4 * pi * f * trip) end)
local seen = assert(ls.tdr(freq, reflection, { 0.1e-9, 0.5e-9, 1e-9 }, { rise_time = rise }))
t.close(seen[1], 50, 1e-6)
t.close(seen[2], 75, 1e-6)
t.close(seen[3], 75, 1e-6)
t.close(ls.tdr(freq, reflection, { 0.5e-9 }, { rise_time = rise, z_ref = 100, port = 1 })[1], 150, 1e-6)
t.check(ls.tdr(freq, one_port(function() return 1, 0 end), { 1e-9 }, { rise_time = rise })[1] > 1e12)
t.equal(ls.tdr(freq, one_port(function() return 1.1, 0 end), { 1e-9 }, { rise_time = rise })[1], math.huge)

-- Causal, and an advance that is not.
local early, resolution = ls.causality(freq, line)
t.close(resolution, 1.67 / 100e9, 1e-2)
t.check(early[2][1] < 1e-7 and early[1][2] < 1e-7 and early[1][1] == 0.0)
t.check(ls.causality(freq, line, 0.5e-9)[2][1] < 1e-7)
t.check(ls.causality(freq, line, 0.8e-9)[2][1] > 0.9)
t.check(ls.causality(freq, one_port(function(f) return math.cos(2 * pi * f * 1e-10), math.sin(2 * pi * f * 1e-10) end))[1][1] > 0.9)

-- Insertion loss deviation: the table's fits.
local fits = 0
do
  local c
  for text in assert(io.open(t.dir .. "../data/networks.csv")):lines() do
    local key = text:match("^[%w_]+")
    if key == "case" then c = text:match("^case,loss,") and {} end
    if key and key ~= "case" and c then
      local list = {}
      for number in text:gmatch(",([^,]+)") do list[#list + 1] = tonumber(number) end
      c[key] = list
      if key == "want" then
        fits = fits + 1
        local o = { f_low = c.fit[1], f_high = c.fit[2], constant = c.fit[3] == 1, weighted = c.fit[4] == 1,
          symbol_rate = c.fit[5], transition_time = c.fit[6], receiver_bandwidth = c.fit[7] }
        local r, deviation = assert(ls.insertion_loss_deviation(c.freq, c.loss, o))
        local top = 0
        for i, f in ipairs(c.freq) do
          if deviation[i] == deviation[i] then
            local fit = r.a0 + r.a1 * math.sqrt(f) + r.a2 * f + r.a4 * f * f
            t.close(deviation[i], c.loss[i] - fit, 0, 1e-10)
            top = math.max(top, math.abs(deviation[i]))
          end
        end
        t.equal(r.greatest, top)
        local got = { r.a0, r.a1, r.a2, r.a4, r.rms, r.greatest, r.fom, r.points }
        t.equal(#got, #c.want)
        for i, want in ipairs(c.want) do t.close(got[i], want, 1e-9, 1e-12, "want " .. i) end
      end
    end
  end
end
t.check(fits >= 4)
do
  local f, loss = ls.linspace(1e9, 20e9, 40), ls.array(40)
  for i = 1, 40 do loss[i] = 2e-5 * math.sqrt(f[i]) + 3e-10 * f[i] end
  local r, deviation = ls.insertion_loss_deviation(f, loss)
  t.close(r.a1, 2e-5, 1e-9)
  t.close(r.a2, 3e-10, 1e-9)
  t.check(r.fom == nil and r.a0 == 0.0 and r.rms < 1e-12 and r.points == 40 and #deviation == 40)
  local part, nan = ls.insertion_loss_deviation(f, loss, { f_low = 5e9 })
  t.check(part.points < 40 and nan[1] ~= nan[1] and nan[40] == nan[40])
end

-- Warnings and failures.
do
  local out, message, code = ls.step_response(freq, line, times, { rise_time = 5e-12 })
  t.check(#out == 19 and message:find("rise_time = 5e-12 s", 1, true))
  t.equal(code, ls.W_RANGE)
  out, message, code = ls.step_response(freq, line, { 0, 1 }, { rise_time = rise })
  t.check(#out == 2 and message:find("t[2] = 1 s", 1, true), message)
  t.equal(code, ls.W_RANGE)
end
t.fails("to = 3: must be 1 to 2", ls.E_ARGUMENT, ls.step_response(freq, line, times, { rise_time = rise, to = 3 }))
t.fails("from = 0: must be 1 to 2", ls.E_ARGUMENT, ls.step_response(freq, line, times, { rise_time = rise, from = 0 }))
t.fails("port = 2: must be 1 to 1", ls.E_ARGUMENT, ls.tdr(freq, reflection, times, { rise_time = rise, port = 2 }))
t.fails("rise_time = 0 s", ls.E_ARGUMENT, ls.step_response(freq, line, times, { rise_time = 0 }))
t.fails("nan s: must be >= -1000", ls.E_ARGUMENT, ls.tdr(freq, reflection, { 0, 0 / 0 }, { rise_time = rise }))
t.fails("n = 3 frequencies", ls.E_ARGUMENT, ls.causality({ 0, 1e9, 2e9 }, ls.complex { 1, 0, 1, 0, 1, 0 }))
t.fails("freq[3] = 1e+09 Hz: must be > freq[2] = 1e+09 Hz", ls.E_ARGUMENT, ls.causality({ 0, 1e9, 1e9, 2e9 }, ls.complex { 1, 0, 1, 0, 1, 0, 1, 0 }))
t.fails("s[2, 1, 1] = ", ls.E_ARGUMENT, ls.causality({ 0, 1e9, 2e9, 3e9 }, ls.complex { 1, 0, 0 / 0, 0, 1, 0, 1, 0 }))
t.fails("t0 = -1 s", ls.E_ARGUMENT, ls.causality(freq, line, -1))
t.fails("item 2: loss", ls.E_ARGUMENT, ls.insertion_loss_deviation({ 1e9, 2e9, 3e9, 4e9 }, { 1, 0 / 0, 1, 1 }))
t.fails("0 frequencies", ls.E_ARGUMENT, ls.insertion_loss_deviation({}, {}))
t.raises("freq: 2 numbers, 2001 needed", ls.step_response, { 1, 2 }, line, times, { rise_time = rise })
t.raises("loss: 1 numbers, 2 needed", ls.insertion_loss_deviation, { 1, 2 }, { 1 })
t.raises("missing key 'rise_time'", ls.step_response, freq, line, times, {})
t.raises("table expected, got no value", ls.tdr, freq, line, times)
t.raises("unknown key 'rise'; allowed: port, z_ref, rise_time", ls.tdr, freq, line, times, { rise = 1 })
t.raises("to: integer expected, got 1.5", ls.step_response, freq, line, times, { rise_time = rise, to = 1.5 })
t.raises("constant: boolean expected, got number", ls.insertion_loss_deviation, {}, {}, { constant = 1 })
t.raises("libstub.complex expected, got table", ls.causality, freq, {})
t.raises("number expected, got string", ls.causality, freq, line, "0")

t.done()
