/* The longest stub that a link can bear: six links, three stackups, by notch, by loss and by the rule of thumb. */
#include "invented.h"

/* Longest stub, in mm as text; > before it: even the whole barrel passes, ~: beyond the model. */
static void longest(const lstub_stackup *board, const lstub_signal *signal, double notch, double loss, char text[32])
{
    const int32_t connects[2] = {0, 4};           /* enters on L1, leaves on L3: all below L3 is stub */
    const lstub_via via = make_via(connects, 2);
    lstub_criteria criteria;
    lstub_stub_limit limit;
    lstub_error err;
    LSTUB_INIT(err);
    LSTUB_INIT(limit);
    LSTUB_INIT(criteria);
    criteria.notch_over_nyquist = notch;          /* 0: not asked */
    criteria.added_loss_db = loss;
    const int32_t status = lstub_longest_stub(board, &via, LSTUB_SIDE_BOTTOM, NULL, signal, &criteria, &limit, &err);
    must(status, &err);
    snprintf(text, 32, "%s%s%.3f", status == LSTUB_W_RANGE ? "~" : "",
             limit.limited_by == LSTUB_LIMIT_NONE ? ">" : "", limit.length * 1e3);
}

int main(void)
{
    lstub_error err;
    lstub_stackup *boards[STACKUPS];
    LSTUB_INIT(err);
    printf("Longest stub below L3, in mm, so that the first notch is at 2 x Nyquist or more, and so that it adds\n"
           "0.5 dB at Nyquist at most. >: even the whole barrel passes. Rule: 0.3 inch Gb/s over the bit rate.\n"
           "Via 0.25 mm, antipad 0.75 mm, four return vias 1 mm away. Stackups and links are invented.\n\n"
           "%-18s%10s%9s", "link", "Nyquist", "rule");
    for (int s = 0; s < STACKUPS; s++) {
        boards[s] = make_stackup(s);
        printf("%20s", stackups[s].name);
    }
    printf("\n%-18s%10s%9s", "", "GHz", "mm");
    for (int s = 0; s < STACKUPS; s++)
        printf("%11s%9s", "notch", "loss");
    printf("\n");
    for (int k = 0; k < LINKS; k++) {
        const lstub_signal signal = make_signal(k);
        double nyquist, bits, rule;
        must(lstub_signal_nyquist(&signal, &nyquist, &err), &err);
        must(lstub_signal_bit_rate(&signal, &bits, &err), &err);
        must(lstub_rule_of_thumb_length(bits, &rule, &err), &err);
        printf("%-18s%10.4f%9.3f", links[k].name, nyquist / 1e9, rule * 1e3);
        for (int s = 0; s < STACKUPS; s++) {
            char by_notch[32], by_loss[32];
            longest(boards[s], &signal, 2.0, 0.0, by_notch);
            longest(boards[s], &signal, 0.0, 0.5, by_loss);
            printf("%11s%9s", by_notch, by_loss);
        }
        printf("\n");
    }
    printf("\n~: outside the stated range of the model. Estimates: confirm with the fabricator, verify critical links\n"
           "by measurement.\n");
    for (int s = 0; s < STACKUPS; s++)
        lstub_stackup_destroy(boards[s]);
    return 0;
}
