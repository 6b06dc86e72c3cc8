/* Which routing layers need no drilling: for three stackups and six data rates a through via from L1 to each. */
#include "invented.h"

/* One stackup: a row for each routing layer, a column for each link. */
static void sweep(int which, const lstub_criteria *criteria)
{
    lstub_error err;
    lstub_stackup *board = make_stackup(which);
    lstub_via vias[LAYERS_MAX];
    lstub_margin margins[LINKS][LAYERS_MAX];
    int32_t status[LINKS][LAYERS_MAX];
    int32_t connects[LAYERS_MAX][2], number[LAYERS_MAX], count = 0;
    const int32_t copper = stackups[which].copper;
    LSTUB_INIT(err);
    for (int32_t n = 3; n <= copper; n++) {
        if (is_plane(n, copper))
            continue;
        connects[count][0] = 0;
        must(lstub_stackup_copper(board, n - 1, &connects[count][1], &err), &err);
        vias[count] = make_via(connects[count], 2);
        number[count++] = n;
    }
    printf("\n%s, %d copper layers\n%-6s%9s", stackups[which].name, (int)copper, "layer", "stub/mm");
    for (int k = 0; k < LINKS; k++) {
        const lstub_signal signal = make_signal(k);
        for (int32_t i = 0; i < count; i++)
            LSTUB_INIT(margins[k][i]);
        must(lstub_margin_batch(board, vias, sizeof vias[0], &signal, 0, criteria, 0, (size_t)count, NULL,
                                margins[k], sizeof margins[k][0], status[k], &err), &err);
        printf("%19s", links[k].name);
    }
    printf("\n");
    for (int32_t i = 0; i < count; i++) {
        printf("L%-5d%9.3f", (int)number[i], margins[0][i].stub_length * 1e3);
        for (int k = 0; k < LINKS; k++) {
            const lstub_margin *m = &margins[k][i];
            char text[64] = "no stub";
            if (m->stub_length > 0.0)
                snprintf(text, sizeof text, "%s%s%.1fx %.1fdB", status[k][i] == LSTUB_W_RANGE ? "~" : "",
                         m->pass ? "" : "DRILL ", m->notch_over_nyquist, m->added_loss_db);
            printf("%19s", text);
        }
        printf("\n");
    }
    lstub_stackup_destroy(board);
}

int main(void)
{
    lstub_criteria criteria;
    LSTUB_INIT(criteria);
    criteria.notch_over_nyquist = 2.0;
    criteria.added_loss_db = 0.5;
    printf("Through vias from L1 to each routing layer: first notch over Nyquist, and loss added at Nyquist.\n"
           "DRILL: below 2 x or above 0.5 dB, so the stub has to go. ~: outside the stated range of the model.\n"
           "Stackups and links are invented.\n");
    for (int s = 0; s < STACKUPS; s++)
        sweep(s, &criteria);
    return 0;
}
