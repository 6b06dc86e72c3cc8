/* One frequency of a compiled cavity model: what is computed once and kept, and the pieces of the cascade. */
#ifndef LSTUB_CAVITY_STATE_H
#define LSTUB_CAVITY_STATE_H

#include "model/cavity_model.h"
#include "num/bessel.h"
#include "num/dense.h"

#include <string.h>

#define N      LSTUB__CAV_CELLS
#define P      LSTUB__CAV_POINTS
#define STORED 12                   /* sets of rims whose Bessel functions are kept                      */
#define SINGLE 24                   /* radii, the same                                                   */
#define BLOCKS 6                    /* kernels whose matrices are kept                                   */
#define SMALL  8                    /* cells of those                                                    */

typedef struct rim_store {          /* what mode 0 needs at a set of rims */
    int medium, rims, small;
    double r_in;                    /* of the barrel, where small */
    cplx i[P], s[P], l[P];      /* small, barrel: phi, psi, lambda of barrel_waves; small, no barrel: (I0 - 1)/kappa^2 */
} rim_store;                        /* and S/kappa^2, S = K0 + (ln(kappa x/2) + gamma) I0; otherwise I0, K0 */

typedef struct radius_store {
    int medium;
    double r;
    cplx i0, k0;
} radius_store;

/* A slab's admittances, and mode 0's rank-one term -(top, -bottom)(top, -bottom)'/loop kept apart from them. */
typedef struct block {
    cplx *tt, *bb, *tb, *top, *bottom;
    cplx loop;                  /* 0: mode 0 is in the matrices */
} block;

typedef struct kept_block {         /* of slabs whose faces are alike */
    int kernel, answer;
    cplx tt[SMALL * SMALL], bb[SMALL * SMALL], tb[SMALL * SMALL], top[SMALL], loop;
} kept_block;

typedef struct state {
    const lstub__cavity *m;
    const cplx *eps, *surface;      /* surface null: perfect metal */
    double k0;
    int plain;                      /* every slab as if no trace left: for the planes' capacitances */
    cplx kappa[LSTUB__CAV_MEDIA];
    int echo_known[CAV_ANSWERS];
    cav_echo echo[CAV_ANSWERS];
    int stored, singles, blocks;
    rim_store rim[STORED];
    radius_store radius[SINGLE];
    kept_block kept[BLOCKS];
} state;

/* A mode at the rims of a face: F(x, y) = lambda(min) - phi(min) psi(max). */
typedef struct mode_at {
    cplx phi[P], psi[P], lambda[P];
    cplx log_factor;            /* lambda = log_factor ln x where `plain`                    */
    cplx loop;                  /* k0^2/rho: mode 0 has the term -phi(x) phi(y)/loop besides; 0: none */
    int plain;
} mode_at;

/* What a mode's solutions are in a slab. Inner: I0 - T K0 (in a hole s I0, plus c1 outside), outer: K0 - Q I0. */
typedef struct mode_form {
    cplx kappa, t, q, scale;    /* scale: 1/(kappa^2 D), with the slab's permittivity */
    int hole, small;                /* small: mode 0, all of it at small kappa rho */
    cplx kf, s, sigma, qi, c1, c2, inner_log, outer_log, jump, w;
} mode_form;


/* Whether a slab's outer wave is its region's. */
static inline int cav_shared(const state *w, const cav_slab *s) { return s->region >= 0 && !w->plain; }

/* A mode at the rims of an opening of a slab: cavity_wave.c. */
void cav_make_form(state *w, const cav_slab *s, int mode, mode_form *f);
void cav_mode_on(state *w, const mode_form *f, const cav_slab *s, const cav_opening *o, int mode, mode_at *v);
void cav_wave_of(state *w, const cav_slab *s, cplx *t, cplx *c, cplx *own);
const cav_echo *cav_echo_of(state *w, const cav_slab *s);

/* The block of a slab: cavity_block.c. `own` has room for N x N cells in each matrix; the result may lie elsewhere. */
void cav_block(state *w, const cav_slab *s, block *own);
void cav_sums(const cav_opening *o, const cplx *v, cplx *out);
void cav_half_admittance(const state *w, const double *half, int cells, cplx *y);

/* The state of one frequency; eps[media] and surface[metals] stay the caller's. */
void cav_state(state *w, const lstub__cavity *m, double k0, const cplx *eps, const cplx *surface);

#endif
