-- Stackups, links and traces that the examples share. All invented, though of sizes that exist.
local ls = require "libstub"

local M = {}

M.stackups = {
    { name = "module",    copper = 12, spacing = 0.090e-3, dk = 3.05, loss_tangent = 0.0016 },
    { name = "line card", copper = 20, spacing = 0.105e-3, dk = 3.35, loss_tangent = 0.0040 },
    { name = "backplane", copper = 28, spacing = 0.125e-3, dk = 3.70, loss_tangent = 0.0080 },
}
M.links = {
    { name = "10.3125 GBd NRZ",  signal = { symbol_rate = 10.3125e9,  levels = 2 } },
    { name = "25.78125 GBd NRZ", signal = { symbol_rate = 25.78125e9, levels = 2 } },
    { name = "26.5625 GBd PAM4", signal = { symbol_rate = 26.5625e9,  levels = 4 } },
    { name = "32 GBd NRZ",       signal = { symbol_rate = 32e9,       levels = 2 } },
    { name = "53.125 GBd PAM4",  signal = { symbol_rate = 53.125e9,   levels = 4 } },
    { name = "106.25 GBd PAM4",  signal = { symbol_rate = 106.25e9,   levels = 4 } },
}

-- Copper layer `number` of `count`, from 1: signals and planes take turns from both sides inwards.
function M.is_plane(number, count)
    return (number <= count // 2 and number or count + 1 - number) % 2 == 0
end

function M.make_stackup(s)
    local layers = {}
    for n = 1, s.copper do
        local outer = n == 1 or n == s.copper
        layers[#layers + 1] = { name = "L" .. n, kind = M.is_plane(n, s.copper) and "plane" or "signal",
                                thickness = outer and 45e-6 or 18e-6 }
        if n < s.copper then
            layers[#layers + 1] = { name = "D" .. n, kind = "dielectric", thickness = s.spacing, dk = s.dk,
                                    in_plane_ratio = 1.15, loss_tangent = s.loss_tangent }
        end
    end
    return assert(ls.stackup(layers))
end

-- A through via of 0.25 mm with four return vias 1 mm away; the caller says where it connects.
function M.make_via(stackup, connects)
    return assert(ls.via(stackup, { drill = 0.25e-3, pad = 0.50e-3, antipad = 0.75e-3,
                                    returns = { count = 4, distance = 1.0e-3 }, connects = connects }))
end

-- Return vias around a pair with its first barrel at (0, 0) and its partner at (1, 0) mm, m.
M.around_pair = { { -1e-3, 0.0 }, { 0.0, -1e-3 }, { 0.0, 1e-3 }, { 1e-3, -1e-3 }, { 1e-3, 1e-3 }, { 2e-3, 0.0 } }

local function pick(layer, keys)
    local found = {}
    for _, key in ipairs(keys) do
        found[key] = layer[key]
    end
    return found
end

-- Ports of a via on the Heron line card of examples/data: a microstrip on TOP, a stripline on one of its inner layers.
-- Cross-sections are those of the stackup; between two planes a stripline has one dielectric below and one above. The
-- thin solder mask on the microstrip is left out.
function M.trace_ports(board, exit_layer, distance)
    local function trace(name, kind, width)
        local i = assert(board:find(name))
        local above, layer, below = board:layer(i - 1), board:layer(i), board:layer(i + 1)
        local resin = { "dk", "in_plane_ratio", "loss_tangent", "f_ref" }
        local stripline = kind == "stripline"
        return { kind = kind, width = width, thickness = layer.thickness,
                 conductor = pick(layer, { "conductivity", "roughness", "roughness_law" }),
                 height_below = below.thickness, dielectric_below = pick(below, resin),
                 height_above = stripline and above.thickness or nil, dielectric_above = stripline and pick(above, resin) or nil }
    end
    return { { layer = "TOP", trace = trace("TOP", "microstrip", 0.24e-3), distance = distance },
             { layer = exit_layer, trace = trace(exit_layer, "stripline", 0.10e-3), distance = distance } }
end

return M
