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

#define LSTUB__PANEL_ORDER 16
#define LSTUB__TABLE_SIZE  (8 * LSTUB__WAYS * LSTUB__WAYS)   /* doubles of the largest S                     */

typedef struct lstub__panel {                    /* S between two frequencies                                */
    double  low, high;
    double *coef;                                /* [LSTUB__PANEL_ORDER][2 size size]                        */
} lstub__panel;

struct lstub_transition {
    lstub_allocator alloc;
    int     size;                                /* ports in all                                             */
    lstub__panel *panel;                         /* the table, rising; null: none                            */
    size_t  panels;
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

/* All ports, those of the barrel, then the partner's: out[2 size size]. */
void lstub__transition_whole(const lstub_transition *t, double f, double *out);

/* The table: made once; 0 where f is outside it. */
int32_t lstub__table_build(lstub_transition *t, double f_table, lstub_error *err);
void    lstub__table_drop(lstub_transition *t);
int     lstub__table_read(const lstub_transition *t, double f, double *out);

#endif
