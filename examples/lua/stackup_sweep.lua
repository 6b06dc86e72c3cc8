-- Which routing layers need no drilling: for three stackups and six data rates a through via from L1 to each.
package.path = (arg[0]:match("^(.*/)") or "./") .. "?.lua;" .. package.path
local ls = require "libstub"
local invented = require "invented"
local criteria = { notch_over_nyquist = 2.0, added_loss_db = 0.5 }

-- One stackup: a row for each routing layer, a column for each link.
local function sweep(s)
    local board, layers, vias, margins = invented.make_stackup(s), {}, {}, {}
    for n = 3, s.copper do
        if not invented.is_plane(n, s.copper) then
            layers[#layers + 1] = n
            vias[#vias + 1] = invented.make_via(board, { "L1", "L" .. n })
        end
    end
    local head = string.format("%-6s%9s", "layer", "stub/mm")
    for k, link in ipairs(invented.links) do
        margins[k] = assert(ls.margin_batch(board, vias, link.signal, criteria))
        head = head .. string.format("%19s", link.name)
    end
    print(string.format("\n%s, %d copper layers", s.name, s.copper))
    print(head)
    for i, layer in ipairs(layers) do
        local row = string.format("L%-5d%9.3f", layer, margins[1][i].stub_length * 1e3)
        for k = 1, #margins do
            local m, text = margins[k][i], "no stub"
            if m.stub_length > 0.0 then
                local marks = (m.status == ls.W_RANGE and "~" or "") .. (m.pass and "" or "DRILL ")
                text = string.format("%s%.1fx %.1fdB", marks, m.notch_over_nyquist, m.added_loss_db)
            end
            row = row .. string.format("%19s", text)
        end
        print(row)
    end
end

print("Through vias from L1 to each routing layer: first notch over Nyquist, and loss added at Nyquist.\n" ..
      "DRILL: below 2 x or above 0.5 dB, so the stub has to go. ~: outside the stated range of the model.\n" ..
      "Stackups and links are invented.")
for _, s in ipairs(invented.stackups) do
    sweep(s)
end
