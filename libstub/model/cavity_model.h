/* The compiled cavity model: one block of memory, pointers into itself, read only after compilation. */
#ifndef LSTUB_CAVITY_MODEL_H
#define LSTUB_CAVITY_MODEL_H

#include "model/cavity_parts.h"

typedef struct cav_opening {        /* a face, ready to use */
    int     points, cells, refine;
    int     same_rims;              /* number of the set of rims, for the store of Bessel functions */
    const double *x, *log_x;        /* [points]                                                     */
    const double *c;                /* [cells][refine + 1], coefficients on the rims of each cell   */
    const double *log_self;         /* [cells], sum of c c ln min                                   */
} cav_opening;

typedef struct cav_kernel {         /* modes n >= first of slabs that are alike                     */
    int     same;                   /* both faces alike: even and odd sums; else top, bottom, cross */
    int     degree, first, entries;
    double  u_max, q;
    const double *coef;             /* [degree + 1][entries]                                        */
    const double *coef_q;           /* the same, derivative by q; NULL without hole                 */
} cav_kernel;

struct lstub__cavity {
    size_t  bytes;
    void  (*release)(void *, void *);
    void   *user;
    int     slabs, openings, kernels, media, outer, rim_sets;
    int     half_opening, half_medium;
    double  port_log;               /* ln(antipad/barrel) of the first opening                      */
    int     port_medium;
    double  feed_length;
    const cav_slab    *slab;        /* top and bottom are openings here                             */
    const cav_opening *opening;
    const cav_kernel  *kernel;
    const double      *half;        /* half-space: [4][cells][cells], factors of 1, k^2, k^4, and -j k^3 */
    lstub__cav_returns returns;         /* its vias lie in the same block                               */
    double  ratio[LSTUB__CAV_MEDIA];
};

/* Coefficients of a face's cells on its rims. */
void cav_cell_coefficients(const cav_face *face, double *c);
/* Half-space below a face: out[4][cells][cells]. */
void cav_half_space(const cav_face *face, const double *c, double *out);
/* Answer of vias and partner to a wave K0(kappa rho) from the barrel: amplitude of I0(kappa rho) there. NaN: singular. */
cplx cav_ring(const lstub__cav_returns *returns, cplx kappa);

#endif
