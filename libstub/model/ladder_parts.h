/* On the way to a ladder: slabs that are alike, openings, the static field. */
#ifndef LSTUB_LADDER_PARTS_H
#define LSTUB_LADDER_PARTS_H

#include "model/cavity_model.h"
#include "model/ladder_model.h"

#define LADDER_ANNULI 4             /* of an opening                                                            */
#define LADDER_MOST   12            /* annuli of any one, with those outside and inside                         */
#define LADDER_RIMS   (2 * (LADDER_MOST + 1))
#define LADDER_PAIRS  (LADDER_RIMS * (LADDER_RIMS + 1) / 2)

typedef struct ladder_kind {        /* slabs that are alike: all modes but the loop over pairs of rims, per eps */
    int    slab, points;
    int    place[2][LADDER_MOST + 1];               /* of the rims of top and bottom among all                  */
    double x[LADDER_RIMS], log_x[LADDER_RIMS];
    double even[2][LADDER_PAIRS], odd[2][LADDER_PAIRS];     /* n even and odd: at frequency 0, slope in eps k0^2 */
} ladder_kind;

typedef struct ladder_joint {       /* an opening: what it answers to the one above, the voltages of its annuli */
    double follow[LADDER_MOST * LADDER_MOST], own[LADDER_MOST], v[LADDER_MOST];
} ladder_joint;

typedef struct ladder_work {
    const lstub__cav_barrel *barrel;
    cav_mesh  mesh;                 /* its first slab is all of the feeding line                                */
    int       kinds, of[CAV_SLABS];
    cav_face *face;
    ladder_kind  *kind;
    ladder_joint *joint;            /* of each face                                                             */
} ladder_work;

/* Mode 0 around a barrel of radius a: U = l + kappa^2 u[0] + kappa^4 u[1], P = 1 + kappa^2 p[0] + kappa^4 p[1]. */
typedef struct ladder_wave { double l, u[2], p[2]; } ladder_wave;
ladder_wave ladder_wave_at(double a, double x);

/* Which slabs are alike: w->of, and in sample[] one of each. */
void   ladder_number(ladder_work *w, int *sample);
/* Its modes; k->slab is given. Scratch of that size. */
void   ladder_sum(const ladder_work *w, ladder_kind *k, double *scratch);
size_t ladder_sum_scratch(void);
/* Entry over two rims of the admittance per eps, or of (1) its slope. cross: between the faces. */
double ladder_entry(const ladder_work *w, const ladder_kind *k, int p, int q, int cross, int slope);
/* The static field: joint[].v. 0, or -2 where a matrix is singular. */
int    ladder_solve(const ladder_work *w);

#endif
