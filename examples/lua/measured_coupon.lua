-- From the lab to the model: notches of measured coupons, the laminate's in-plane Dk, and what that says about the board.
--
--     lua measured_coupon.lua BOARD.xml[.gz] OUTDIR
--
-- On the stackup of the demo board, examples/data/demo_board.xml.gz. The measurements are invented: this program makes them
-- itself, with another in-plane Dk than the stackup has, lossy traces and noise, writes them to OUTDIR as Touchstone files, and
-- then knows no more than a lab would.
package.path = (arg[0]:match("^(.*/)") or "./") .. "?.lua;" .. package.path
local ls = require "libstub"
local invented = require "invented"

local assumed = 1.15  -- in-plane over through-plane Dk, before anything was measured
local exits = { "IN1", "IN2", "IN3", "IN5", "IN6", "IN7" }  -- a coupon each: from TOP to here, what is below is stub
local length_sigma = 5e-6  -- m, of a stub's length on a microsection
local drill = { side = "bottom", depth = 1.0e-3, diameter = 0.45e-3 }  -- as ordered for one more coupon, TOP to IN1
local link = { symbol_rate = 32e9 }
local criteria = { notch_over_nyquist = 2.0, added_loss_db = 0.5 }
local fabricator = { depth_tolerance = 50e-6, cut_clearance = 50e-6, residual_min = 50e-6, residual_target = 150e-6,
                     bit_oversize = 0.2e-3 }

local function printf(format, ...)
    print(string.format(format, ...))
end

local function make_via(board, exit_layer, backdrill)
    return assert(ls.via(board, { drill = 0.25e-3, pad = 0.50e-3, antipad = 0.75e-3, returns = { count = 4, distance = 1.0e-3 },
                                  connects = { "TOP", exit_layer }, backdrills = { backdrill } }))
end

local function stub_length(via)
    return assert(via:stubs())[1].length
end

-- ---- the invented measurement: nothing below it looks in here ----

local true_ratio, true_drill = 1.22, { side = "bottom", depth = 0.93e-3, diameter = 0.45e-3 }

-- Normal numbers that are the same everywhere: Park and Miller's generator, Box and Muller's transform.
local function add_noise(numbers, sigma, seed)
    local state = seed
    for k = 1, #numbers, 2 do
        state = 16807 * state % 2147483647
        local radius = sigma * math.sqrt(-2.0 * math.log(state / 2147483647))
        state = 16807 * state % 2147483647
        local angle = 2.0 * math.pi * state / 2147483647
        numbers[k] = numbers[k] + radius * math.cos(angle)
        numbers[k + 1] = numbers[k + 1] + radius * math.sin(angle)
    end
    return numbers
end

local function invent_measurements(file, folder)
    local board = assert(file:stackup():with_in_plane_ratio(true_ratio))
    local f = ls.array(1600)
    for k = 1, #f do f[k] = k * 25e6 end
    local function measure(name, exit_layer, backdrill, seed)
        local ports = invented.trace_ports(board, exit_layer, 40e-3)
        local s = assert(assert(ls.transition(make_via(board, exit_layer, backdrill), { ports = ports })):s(f))
        s = ls.complex(add_noise(s:interleaved(), 7e-4, seed), 2)
        assert(ls.touchstone_save({ freq = f, data = s, unit = "GHz", digits = 6,
                                    comments = { " invented: computed, with noise, not measured" } },
                                  folder .. "/coupon_" .. name .. ".s2p"))
    end
    for seed, name in ipairs(exits) do measure(name, name, nil, seed) end
    measure("drilled", "IN1", true_drill, #exits + 1)
end

-- ---- the lab ----

-- The first notch of a coupon's S21, or nil.
local function read_notch(folder, name)
    local data = assert(ls.touchstone_load(folder .. "/coupon_" .. name .. ".s2p")):get()
    return assert(ls.find_notches(data.freq, data.data, { to = 2, from = 1 }))[1]
end

local function show_notch(name, stub, notch)
    if not notch then
        printf("%-9s%8.3f   nothing found to 40 GHz", name, stub * 1e3)
        return
    end
    local dk, sigma = assert(ls.fit_effective_dk(notch.f, notch.f_sigma, stub, length_sigma, 1))
    local quality = #notch.quality == 0 and "good" or table.concat(notch.quality, " ")
    local q = notch.q and string.format("%.1f", notch.q) or "none"  -- the noise hides the floor
    printf("%-9s%8.3f%9.3f%8.3f%9.1f%7s%9.3f%8.3f  %s", name, stub * 1e3, notch.f / 1e9, notch.f_sigma / 1e9, notch.depth_db,
           q, dk, sigma, quality)
end

-- The notch of a whole coupon over that of its stub alone: what the path through the via and its traces move it by.
local function pull(via, exit_layer)
    local alone = assert(assert(via:model()):notches(60e9))[1].f
    local ports = invented.trace_ports(via:stackup(), exit_layer, 2e-3)
    return assert(assert(ls.transition(via, { ports = ports })):notches(1.2 * alone))[1].f / alone
end

-- The fit to all coupons that show a notch, and once more with a common error of length.
local function fit_laminate(board, names, notches)
    local vias, f, sigma = {}, {}, {}
    for i, name in ipairs(names) do
        vias[i] = make_via(board, name)
        f[i] = notches[i].f / pull(vias[i], name)  -- of the stub alone
        sigma[i] = notches[i].f_sigma
    end
    local fit, _, fitted = assert(ls.fit_coupons(board, vias, f, sigma))
    local free = assert(ls.fit_coupons(board, vias, f, sigma, { with_offset = true }))
    printf("\nIn-plane Dk over the data sheet's, all laminates alike: %.4f +/- %.4f, 95 %%: %.4f to %.4f (assumed: %.2f)\n" ..
           "chi2 %.2f of %d: the model %s", fit.ratio, fit.ratio_sigma, fit.ratio_low, fit.ratio_high, assumed, fit.chi2, fit.dof,
           fit.describes and "describes them" or "does NOT describe them: do not use it")
    printf("with all stubs longer by the same: %.4f +/- %.4f, longer by %.1f um, 95 %%: %.1f to %.1f", free.ratio, free.ratio_sigma,
           free.offset * 1e6, free.offset_low * 1e6, free.offset_high * 1e6)
    return fit, fitted
end

-- How long the stub of the drilled coupon is, from its notch. Its effective Dk depends on its length, a little: by turns.
local function check_drill(board, notch, ratio_sigma)
    local ordered = stub_length(make_via(board, "IN1", drill))
    local length, sigma, dk = ordered, nil, nil
    for _ = 1, 4 do
        local via = make_via(board, "IN1", { side = "bottom", depth = drill.depth + ordered - length, diameter = drill.diameter })
        dk = assert(assert(via:model()):line(1)).dk_effective
        length, sigma = assert(ls.fit_length(notch.f / pull(via, "IN1"), notch.f_sigma, dk, dk * ratio_sigma, 1))
    end
    printf("\nDrilled coupon: notch at %.3f GHz, with a Dk of %.3f a stub of %.3f +/- %.3f mm; ordered %.3f mm:\n" ..
           "the drill stopped %.3f mm short, of %.3f mm allowed. One hole says little of the next one.", notch.f / 1e9, dk,
           length * 1e3, sigma * 1e3, ordered * 1e3, (length - ordered) * 1e3, fabricator.depth_tolerance * 1e3)
end

-- A via of the product, TOP to IN3, on each stackup: as it is, and with the longest stub that the drill may leave.
local function predict(boards)
    printf("\nThe product's via, TOP to IN3, at 32 GBd NRZ: 2 x Nyquist and 0.5 dB wanted\n" ..
           "%-22s%9s%9s%9s%9s%9s%9s%9s", "in-plane ratio", "notch", "limit", "depth", "left", "notch", "Nyquist", "adds")
    printf("%-22s%9s%9s%9s%9s%9s%9s%9s", "", "GHz", "mm", "mm", "mm", "GHz", "x", "dB")
    for _, entry in ipairs(boards) do
        local name, board = table.unpack(entry)
        local job = { via = make_via(board, "IN3"), signal = link, criteria = criteria }
        local d = assert(ls.plan(board, { job }, fabricator)):decision(1)
        printf("%-22s%9.2f%9.3f%9.3f%9.3f%9.2f%9.2f%9.3f", name, d.before.f1 / 1e9, d.bottom.limit * 1e3, d.bottom.depth * 1e3,
               d.bottom.residual_most * 1e3, d.after.f1 / 1e9, d.after.notch_over_nyquist, d.after.added_loss_db)
    end
    print("limit: longest stub that passes; left: longest that the drill may leave, tolerances added; after it: with that stub.")
end

if #arg ~= 2 then
    io.stderr:write("usage: measured_coupon.lua BOARD.xml[.gz] OUTDIR\n")
    os.exit(1)
end
local file, folder = assert(ls.board_load(arg[1])), arg[2]
invent_measurements(file, folder)

local board = assert(file:stackup():with_in_plane_ratio(assumed))
print("Coupons of an invented board, TOP to the layer named. The measurements are invented: computed, with noise.\n")
printf("%-9s%8s%9s%8s%9s%7s%9s%8s  %s", "coupon", "stub", "notch", "+/-", "depth", "Q", "Dk eff", "+/-", "quality")
printf("%-9s%8s%9s%8s%9s", "", "mm", "GHz", "GHz", "dB")
local shown, notches = {}, {}
for _, name in ipairs(exits) do
    local notch = read_notch(folder, name)
    show_notch(name, stub_length(make_via(board, name)), notch)
    if notch then
        shown[#shown + 1], notches[#notches + 1] = name, notch
    end
end
local fit, fitted = fit_laminate(board, shown, notches)
check_drill(fitted, read_notch(folder, "drilled"), fit.ratio_sigma)
predict({ { string.format("%.4f, assumed", assumed), board }, { string.format("%.4f, fitted", fit.ratio), fitted },
          { string.format("%.4f, upper end", fit.ratio_high), assert(board:with_in_plane_ratio(fit.ratio_high)) } })
printf("\nPut into the invented measurement: in-plane ratio %.2f, drill %.3f mm short.\n" ..
       "The intervals are those of the measurement: the model's own error comes on top (docs/theory.md), and other lots of the\n" ..
       "laminate differ. Confirm depths and tolerances with the fabricator; verify critical links by measurement.",
       true_ratio, (drill.depth - true_drill.depth) * 1e3)
