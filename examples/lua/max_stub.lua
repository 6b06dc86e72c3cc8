-- The longest stub that a link can bear: six links, three stackups, by notch, by loss and by the rule of thumb.
package.path = (arg[0]:match("^(.*/)") or "./") .. "?.lua;" .. package.path
local ls = require "libstub"
local invented = require "invented"

-- Longest stub, in mm as text; > before it: even the whole barrel passes, ~: beyond the model.
local function longest(via, signal, criteria)
    local limit, message, code = ls.longest_stub(via, signal, criteria)
    assert(limit, message)
    local beyond, whole = code == ls.W_RANGE and "~" or "", limit.limited_by == "none" and ">" or ""
    return string.format("%s%s%.3f", beyond, whole, limit.length * 1e3)
end

local vias = {}
local head = string.format("%-18s%10s%9s", "link", "Nyquist", "rule")
local below = string.format("%-18s%10s%9s", "", "GHz", "mm")
for i, s in ipairs(invented.stackups) do
    vias[i] = invented.make_via(invented.make_stackup(s), { "L1", "L3" })  -- all below L3 is stub
    head = head .. string.format("%20s", s.name)
    below = below .. string.format("%11s%9s", "notch", "loss")
end
print("Longest stub below L3, in mm, so that the first notch is at 2 x Nyquist or more, and so that it adds\n" ..
      "0.5 dB at Nyquist at most. >: even the whole barrel passes. Rule: 0.3 inch Gb/s over the bit rate.\n" ..
      "Via 0.25 mm, antipad 0.75 mm, four return vias 1 mm away. Stackups and links are invented.\n")
print(head)
print(below)
for _, link in ipairs(invented.links) do
    local rule = assert(ls.rule_of_thumb_length(assert(ls.signal_bit_rate(link.signal))))
    local row = string.format("%-18s%10.4f%9.3f", link.name, assert(ls.signal_nyquist(link.signal)) / 1e9, rule * 1e3)
    for _, via in ipairs(vias) do
        row = row .. string.format("%11s%9s", longest(via, link.signal, { notch_over_nyquist = 2.0 }),
                                   longest(via, link.signal, { added_loss_db = 0.5 }))
    end
    print(row)
end
print("\n~: outside the stated range of the model. Estimates: confirm with the fabricator, verify critical links\n" ..
      "by measurement.")
