"""The longest stub that a link can bear: six links, three stackups, by notch, by loss and by the rule of thumb."""

import warnings

import libstub as ls
from invented import LINKS, STACKUPS, make_stackup, make_via


def longest(via, criteria):
    """Longest stub for each link, in mm as text; > before it: even the whole barrel passes, ~: beyond the model."""
    limits = ls.longest_stub_batch([via] * len(LINKS), LINKS.values(), criteria)
    return ["%s%s%.3f" % ("~" if status == ls.Status.W_RANGE else "", ">" if by == ls.Limit.NONE else "", length * 1e3)
            for by, length, status in zip(limits.limited_by, limits.length, limits.status)]


def main():
    warnings.simplefilter("ignore", ls.RangeWarning)  # the table marks them
    vias = [make_via(make_stackup(name), ("L1", "L3")) for name in STACKUPS]  # all below L3 is stub
    by_notch, by_loss = ls.Criteria(notch_over_nyquist=2.0), ls.Criteria(added_loss_db=0.5)
    print("Longest stub below L3, in mm, so that the first notch is at 2 x Nyquist or more, and so that it adds\n"
          "0.5 dB at Nyquist at most. >: even the whole barrel passes. Rule: 0.3 inch Gb/s over the bit rate.\n"
          "Via 0.25 mm, antipad 0.75 mm, four return vias 1 mm away. Stackups and links are invented.\n")
    print("%-18s%10s%9s" % ("link", "Nyquist", "rule") + "".join("%20s" % name for name in STACKUPS))
    print("%-18s%10s%9s" % ("", "GHz", "mm") + ("%11s%9s" % ("notch", "loss")) * len(vias))
    columns = [longest(via, criteria) for via in vias for criteria in (by_notch, by_loss)]
    for k, (name, signal) in enumerate(LINKS.items()):
        rule = ls.rule_of_thumb_length(signal.bit_rate)
        row = "%-18s%10.4f%9.3f" % (name, signal.nyquist / 1e9, rule * 1e3)
        print(row + "".join("%11s%9s" % (notch[k], loss[k]) for notch, loss in zip(columns[::2], columns[1::2])))
    print("\n~: outside the stated range of the model. Estimates: confirm with the fabricator, verify critical links\n"
          "by measurement.")


if __name__ == "__main__":
    main()
