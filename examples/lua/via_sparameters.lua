-- A via as a network: as it is, drilled back, and without its stub; what the stub costs is the difference.
--
--     lua via_sparameters.lua BOARD.xml[.gz] OUTDIR
--
-- On the stackup of the demo board, examples/data/demo_board.xml.gz: from a microstrip on TOP to a stripline on IN3. Prints a
-- table and writes a .s2p of each and a pair's .s4p into OUTDIR. Board, via and link are invented.
package.path = (arg[0]:match("^(.*/)") or "./") .. "?.lua;" .. package.path
local ls = require "libstub"
local invented = require "invented"

local link = { symbol_rate = 32e9 }
local criteria = { notch_over_nyquist = 2.0, added_loss_db = 0.5 }
local fabricator = { depth_tolerance = 50e-6, cut_clearance = 50e-6, residual_min = 50e-6, residual_target = 150e-6,
                     bit_oversize = 0.2e-3 }
local rise_time = 15e-12  -- of the step, 20 to 80 percent
local F, T = ls.array(1340), ls.array(301)
for k = 1, #F do F[k] = k * 50e6 end  -- to 67 GHz: 1/rise_time and more
for k = 1, #T do T[k] = (k - 51) * 1e-12 end

-- The via, and a pair of such vias, drilled: { name of the file, transition, via } each.
local function make_networks(path)
    -- woven glass; the file cannot say it
    local board = assert(assert(ls.board_load(path)):stackup():with_in_plane_ratio(1.15))
    local via = assert(ls.via(board, { drill = 0.25e-3, pad = 0.50e-3, antipad = 0.75e-3, connects = { "TOP", "IN3" },
                                       returns = { count = 4, distance = 1.0e-3 } }))
    local ports = invented.trace_ports(board, "IN3", 5e-3)

    -- drilled as planned, and as shallow as the tolerances allow: the longest stub that may be left
    local plan = assert(ls.plan(board, { { via = via, signal = link, criteria = criteria } }, fabricator))
    local cut = plan:decision(1).bottom
    local options = via:options()
    options.backdrills = { { side = "bottom", depth = cut.depth - (cut.residual_most - cut.residual), diameter = cut.diameter } }
    local drilled = assert(ls.via(board, options))
    options.pair = { pitch = 1.0e-3 }
    options.returns = { xy = invented.around_pair }
    local pair = assert(ls.via(board, options))
    return {
        { "via_as_it_is", assert(ls.transition(via, { ports = ports })), via },
        { "via_drilled", assert(ls.transition(drilled, { ports = ports })), drilled },
        { "via_without_stub", (assert(ls.transition(via, { ports = ports, stubs = "removed" }))) },
        { "pair_drilled", assert(ls.transition(pair, { ports = ports })), pair },
    }
end

local function distance(a, b, to, from)
    local re, im = a:get(1, to, from)
    local re2, im2 = b:get(1, to, from)
    return math.sqrt((re - re2) ^ 2 + (im - im2) ^ 2)
end

-- What each is at Nyquist, up to Nyquist, and to an edge.
local function show(networks)
    local nyquist = assert(ls.signal_nyquist(link))
    local bare = assert(networks[3][2]:s({ nyquist }))
    for i = 1, 3 do
        local name, transition, via = table.unpack(networks[i])
        local s, at = assert(transition:s(F)), assert(transition:s({ nyquist }))
        local loss = s:element(2, 1):db()
        for k = 1, #loss do loss[k] = -loss[k] end
        local ripple = assert(ls.insertion_loss_deviation(F, loss, { f_high = nyquist })).rms
        local z = assert(ls.tdr(F, s, T, { rise_time = rise_time })):totable()
        local first = assert(transition:notches(67e9))[1]
        print(string.format("%-18s%8.3f%9.2f%9.2f%9.2f%9.2f%9.3f%9s%9.1f%7.1f", name, via and via:stubs()[1].length * 1e3 or 0.0,
                            -at:db(1, 2, 1), bare:db(1, 2, 1) - at:db(1, 2, 1), ripple, at:db(1, 1, 1), distance(at, bare, 1, 1),
                            first and string.format("%.2f", first.f / 1e9) or "none",
                            math.min(table.unpack(z)), math.max(table.unpack(z))))
    end
end

local function save(networks, folder)
    for _, network in ipairs(networks) do
        local name, transition = table.unpack(network)
        local count, reference = transition:ports(), {}
        for i = 1, count do reference[i] = transition:reference(i) end
        local ports = "1 TOP, 2 IN3" .. (count == 2 and "" or "; of the partner 3 TOP, 4 IN3")
        local file = string.format("%s.s%dp", name, count)
        assert(ls.touchstone_save({ freq = F, data = assert(transition:s(F)), reference = reference, unit = "GHz", digits = 9,
                                    comments = { " " .. name .. ", invented: an estimate from a model", " ports: " .. ports } },
                                  folder .. "/" .. file))
        print("written: " .. file)
    end
end

if #arg ~= 2 then
    io.stderr:write("usage: via_sparameters.lua BOARD.xml[.gz] OUTDIR\n")
    os.exit(1)
end
local networks = make_networks(arg[1])
print("A via of an invented board from TOP to IN3, with 5 mm of trace on either side, at 16 GHz: Nyquist of 32 GBd NRZ.\n" ..
      "Caused by the stub: what differs from the same via without it. Ripple: of the loss about a smooth one, to Nyquist.\n" ..
      "TDR: least and greatest impedance that an edge of 15 ps sees from TOP.\n")
local head = "%-18s%8s%9s%9s%9s%9s%9s%9s%9s%7s"
print(string.format(head, "", "stub", "loss", "caused", "ripple", "S11", "change", "notch", "TDR", "TDR"))
print(string.format(head, "", "mm", "dB", "dB", "dB rms", "dB", "of S11", "GHz", "ohm", "ohm"))
show(networks)
print()
for _, remark in ipairs(networks[1][2]:remarks()) do
    print("Rests on: " .. ls.remark_text(remark) .. ".")
end
print("Estimates from a model: verify critical links by measurement or full-wave simulation, and confirm with the\n" ..
      "fabricator what its drill can hold.\n")
save(networks, arg[2])
