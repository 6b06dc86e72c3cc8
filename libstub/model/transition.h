/* A whole via as a network, compiled. */
#ifndef LSTUB_TRANSITION_H
#define LSTUB_TRANSITION_H

#include "material/trace.h"
#include "model/barrel.h"

#define LSTUB__WAYS (LSTUB__CAV_TAPS + 1)        /* most ports of one barrel                                */

typedef struct lstub__way {                      /* a port of one barrel, as given                           */
    int32_t kind;
    int     place;                               /* its number among the model's: feed, then traces downwards */
    int     has_trace;
    lstub__trace_model trace;
    double  impedance, dk, loss_tangent;         /* of the line without it                                   */
    double  length;                              /* of the line from the pad's rim to the reference plane, m */
    double  launch_l, launch_c;                  /* of what lies over the antipads: H, and m (times |gamma|/(w Z)) */
    double  z_ref;
} lstub__way;

struct lstub_transition {
    lstub_allocator alloc;
    int     ways;                                /* ports of one barrel                                      */
    int     modes;                               /* 1: a single barrel; 2: a pair, odd and even; 0: two barrels in one model */
    int32_t remarks;
    int     perfect;                             /* metal                                                    */
    double  f_top;                               /* Hz, above which there is no answer                       */
    lstub__barrel *barrel[2];
    lstub__cavity *cavity[2];
    lstub__way way[LSTUB__WAYS];
};

/* S of one mode (0: single or odd, 1: even), or of both barrels where modes is 0: s[m][m] in the order of the ports given,
** m = ways or 2 ways. */
void lstub__transition_mode(const lstub_transition *t, int mode, double f, cplx *s);

#endif
