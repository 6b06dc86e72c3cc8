/*
** The self term of the taps. On the face where a trace leaves its current flows as a uniform sheet from the pad's rim out to the
** region's reach, where it ends (cavity_region.c): an inductance, mu0/(2 pi) ln(reach/rim) h_u h_l/(h_u + h_l) with h_u, h_l to the
** planes above and below, and between two traces of one space the h above the upper and below the lower. It is taken off: the real
** trace carries its own. Without a plane on one side the other's h is left.
*/
#include "model/cavity_cascade.h"

static double parallel(const cav_tap *upper, const cav_tap *lower)
{
    if (upper->up == INFINITY) return lower->down;
    if (lower->down == INFINITY) return upper->up;
    return upper->up * lower->down / (upper->up + upper->down);
}

/* z: as ports_of has them, feeds first, then the traces of each barrel. */
void cav_take_sheets(const state *w, int feeds, int ports, cplx *z)
{
    const lstub__cavity *m = w->m;
    int b, i, j;

    for (b = 0; b < m->barrels; b++)
        for (i = 0; i < m->taps[b]; i++)
            for (j = 0; j < m->taps[b]; j++) {
                const cav_tap *p = &m->tap[b][i], *q = &m->tap[b][j];
                int row = feeds + (b == 0 ? 0 : m->taps[0]) + i, column = feeds + (b == 0 ? 0 : m->taps[0]) + j;
                double reach, h;
                if (p->region < 0 || p->region != q->region) continue;
                reach = m->region[p->region].reach;
                h = p->depth <= q->depth ? parallel(p, q) : parallel(q, p);
                z[row * ports + column].im -= w->k0 * LSTUB_ETA0 / (2.0 * LSTUB_PI) * log(reach / fmax(p->rim, q->rim)) * h;
            }
}
