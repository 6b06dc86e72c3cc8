/* The cascade of one frequency: what hangs below a face, a slab to step over, the axial flux that goes with it. */
#ifndef LSTUB_CAVITY_CASCADE_H
#define LSTUB_CAVITY_CASCADE_H

#include "model/cavity_state.h"

#define CAV_CELLS  LSTUB__CAV_CELLS                 /* of all barrels at one face                     */
#define CAV_WIDE   (CAV_CELLS + 1)                  /* and the flux                                   */
#define CAV_TRACES (2 * LSTUB__CAV_TAPS)
#define CAV_PENDING (2 * CAV_SHARED)                /* waves of a region whose slabs are not all stepped over */
#define CAV_COLUMNS (CAV_TRACES + CAV_PENDING)
#define CAV_ALL     (CAV_WIDE + 2 + CAV_COLUMNS)    /* LSTUB__GRAM_WIDE is enough for that              */

typedef struct cav_load {           /* I = y V + s I_o, V_o = s.V + zeta I_o                            */
    int  n, traces, columns;        /* columns: traces, then what is pending                           */
    cplx y[CAV_WIDE * CAV_WIDE], s[CAV_WIDE * CAV_COLUMNS], zeta[CAV_COLUMNS * CAV_COLUMNS];    /* rows of CAV_COLUMNS */
} cav_load;

typedef struct cav_step {           /* a slab between all its openings above and below                  */
    int  na, nb, loops;
    int  pending;                   /* in place of loops: columns whose wave is the region's            */
    cplx *tt, *bb, *tb;             /* [na][na], [nb][nb], [na][nb]                                    */
    cplx *top[2], *bottom[2];       /* mode 0 of each loop                                             */
    cplx loop[4];                   /* [loops][loops]                                                  */
} cav_step;

typedef struct cav_room {           /* where a step's matrices may lie                                 */
    cplx own[2][3 * CAV_CELLS * CAV_CELLS], ends[2][2 * CAV_CELLS];
    cplx tt[CAV_WIDE * CAV_WIDE], bb[CAV_WIDE * CAV_WIDE], tb[CAV_WIDE * CAV_WIDE], column[4][CAV_WIDE];
} cav_room;

typedef struct cav_w {              /* the axial flux: a line along the barrel, one unknown more a face */
    int  on;                        /* this model has one                                              */
    int  started;                   /* ... and the load does too                                       */
    int  plane;                     /* number of the next plane above                                  */
    double gamma;
    cplx y;                         /* characteristic admittance                                       */
} cav_w;

int  cav_step_up(cav_load *l, const cav_step *c);                                            /* cavity_eval.c */
/* Inverse of a 1 x 1 or symmetric 2 x 2 matrix. */
void cav_invert(const cplx *a, int n, cplx *out);
void cav_step_make(state *w, int slab, const cav_w *flux, cav_room *room, cav_step *c);       /* cavity_step.c */
void cav_step_clear(cav_step *c, cav_room *room, int na, int nb);                             /* all zero, in that room */
void cav_block_at(block *b, cplx *own, cplx *ends);
void cav_pair_step(state *w, int slab, cav_room *room, cav_step *c);                          /* cavity_pair.c */

void cav_flux_start(state *w, cav_w *flux);                                                   /* cavity_flux.c */
void cav_flux_plane(const state *w, cav_w *flux, const cav_slab *s, cav_load *l);
void cav_flux_stop(cav_w *flux, cav_load *l);


void cav_add_metal(const state *w, const cav_slab *s, cplx *loop, int n, int stride);
void cav_region_end(state *w, const cav_region *r, cav_load *l);                              /* cavity_region.c */
void cav_take_sheets(const state *w, int feeds, int ports, cplx *z);                                /* cavity_sheet.c */

#endif
