-- A pair whose back-drills differ: mode conversion and skew against the tolerance of the drill, and with one drill forgotten.
--
--     lua pair_skew.lua BOARD.xml[.gz] OUTDIR
--
-- On the stackup of the demo board, examples/data/demo_board.xml.gz: a pair of vias from TOP to IN3, the first drilled deeper by
-- the tolerance, its partner less deep by as much. Prints a table, and writes the mixed modes of the pair with the forgotten
-- drill to OUTDIR, pair_one_missing.ts. Board, pair and link are invented.
package.path = (arg[0]:match("^(.*/)") or "./") .. "?.lua;" .. package.path
local ls = require "libstub"
local invented = require "invented"

local link = { symbol_rate = 25.78125e9 }
local depth, bit = 1.45e-3, 0.45e-3  -- as ordered, m
local tolerances = { 0.0, 25e-6, 50e-6, 75e-6, 100e-6 }  -- m, plus or minus
local rise_time = 15e-12  -- of the step, 20 to 80 percent
local legs = { { 1, 3 }, { 2, 4 } }  -- ports of the pair: first and partner, on TOP and on IN3
local nyquist = assert(ls.signal_nyquist(link))
local F, T = ls.array(670), ls.array(301)
for k = 1, #F do F[k] = k * 100e6 end  -- to 67 GHz: 1/rise_time and more
for k = 1, #T do T[k] = (k - 51) * 1e-12 end

-- The pair as a network; depths of the drills in m, nil: forgotten.
local function make_pair(board, first, partner)
    local function drills(depth)
        return depth and { { side = "bottom", depth = depth, diameter = bit } } or {}
    end
    local via = assert(ls.via(board, {
        drill = 0.25e-3, pad = 0.50e-3, antipad = 0.75e-3, connects = { "TOP", "IN3" }, backdrills = drills(first),
        pair = { pitch = 1.0e-3, backdrills = drills(partner) },
        returns = { xy = invented.around_pair },
    }))
    return (assert(ls.transition(via, { ports = invented.trace_ports(board, "IN3", 5e-3) })))
end

local function db(s, to, from)
    return s:abs(1, to, from) > 1e-10 and s:db(1, to, from) or -math.huge  -- less is rounding
end

-- What comes out of a leg when both are driven with opposite signs.
local function leg(s, to, from, other)
    local re, im = s:get(1, to, from)
    local re2, im2 = s:get(1, to, other)
    return re - re2, im - im2
end

-- The same against time, to a unit step.
local function step_of_leg(s, to, from, other)
    local response = assert(ls.step_response(F, s, T, { rise_time = rise_time, to = to, from = from }))
    local crossed = assert(ls.step_response(F, s, T, { rise_time = rise_time, to = to, from = other }))
    for k = 1, #T do response[k] = response[k] - crossed[k] end
    return response
end

-- The time at which a step is at 0.5, s.
local function half_way(response)
    local k = 2
    while response[k] < 0.5 do k = k + 1 end
    return T[k - 1] + (T[k] - T[k - 1]) * (0.5 - response[k - 1]) / (response[k] - response[k - 1])
end

local function show(name, board, first, partner)
    local pair = make_pair(board, first, partner)
    local at = assert(pair:s({ nyquist }))
    local mixed = assert(ls.to_mixed(at, legs))  -- differential on TOP, on IN3; common on TOP, on IN3
    local re, im = leg(at, 2, 1, 3)
    local re2, im2 = leg(at, 4, 3, 1)
    local skew = math.atan(im * re2 - re * im2, re * re2 + im * im2) / (2 * math.pi * nyquist)
    local s = assert(pair:s(F))
    local step_skew = half_way(step_of_leg(s, 4, 3, 1)) - half_way(step_of_leg(s, 2, 1, 3))
    local _, bottom = assert(board:depth("BOTTOM"))
    local _, exit = assert(board:depth("IN3"))
    local stub = bottom - exit
    print(string.format("%-12s%9.3f%9.3f%9.2f%9.2f%9.2f%11.2f%10.2f", name, (stub - first) * 1e3, (stub - (partner or 0.0)) * 1e3,
                        db(mixed, 2, 1), db(mixed, 4, 1), db(mixed, 2, 3), math.abs(skew) * 1e12, math.abs(step_skew) * 1e12))
    return pair, s
end

-- The network in mixed modes, as Touchstone 2 has them.
local function save_mixed(pair, s, folder, name)
    local reference, rows = {}, {}
    for i = 1, pair:ports() do reference[i] = pair:reference(i) end
    for _, kind in ipairs { "differential", "common" } do
        for _, ports in ipairs(legs) do
            rows[#rows + 1] = { kind = kind, port = ports[1], partner = ports[2] }
        end
    end
    assert(ls.touchstone_save({ freq = F, data = assert(ls.to_mixed(s, legs, reference)), reference = reference, rows = rows,
                                version = 2, unit = "GHz", digits = 9,
                                comments = { " an invented pair, one drill forgotten: an estimate from a model",
                                             " ports: 1 TOP, 2 IN3; of the partner 3 TOP, 4 IN3" } }, folder .. "/" .. name))
    print("written: " .. name)
end

if #arg ~= 2 then
    io.stderr:write("usage: pair_skew.lua BOARD.xml[.gz] OUTDIR\n")
    os.exit(1)
end
-- woven glass; the file cannot say it
local board = assert(assert(ls.board_load(arg[1])):stackup():with_in_plane_ratio(1.15))
print(string.format(
    "A pair of an invented board, TOP to IN3, drilled back %.2f mm. 25.78125 GBd NRZ: Nyquist %.4f GHz, %.1f ps a symbol.\n" ..
    "Drill +/-: the first hole deeper by this, its partner less deep. Skew: between the legs, driven with opposite signs;\n" ..
    "beyond the notch of a leg its phase has turned, and a skew at one frequency says little. -inf: none, but for rounding.\n",
    depth * 1e3, nyquist / 1e9, 1e12 / link.symbol_rate))
print(string.format("%-12s%9s%9s%9s%9s%9s%11s%10s", "drill", "stub", "partner", "Sdd21", "Scd21", "Sdc21", "skew", "skew of"))
print(string.format("%-12s%9s%9s%9s%9s%9s%11s%10s", "", "mm", "mm", "dB", "dB", "dB", "at Nyq. ps", "a step ps"))
for _, tolerance in ipairs(tolerances) do
    show(string.format("+/- %.0f um", tolerance * 1e6), board, depth + tolerance, depth - tolerance)
end
local pair, s = show("one missing", board, depth, nil)
print()
for _, remark in ipairs(pair:remarks()) do
    print("Rests on: " .. ls.remark_text(remark) .. ".")
end
print("Estimates from a model: verify critical links by measurement or full-wave simulation. What a drill really holds, and\n" ..
      "whether two neighbours miss it the same way, the fabricator has to say.\n")
save_mixed(pair, s, arg[2], "pair_one_missing.ts")
