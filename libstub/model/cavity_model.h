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

#define CAV_ANSWERS 32


typedef struct cav_answer {         /* what answers the waves of some slabs */
    unsigned vias;
    int      barrels;               /* bit 0, 1: the barrel, its partner pass through (bit 1: of two in one cascade) */
    int      medium;
} cav_answer;

typedef struct cav_tap {            /* where a trace leaves */
    int    region;
    double depth, rim;
    double up, down;                /* to the planes above and below; INFINITY: none                */
} cav_tap;

/*
** A space between two planes, or beyond the outermost, where traces leave. Its slabs are apart only as far out as `reach`: beyond,
** the wave is one (cavity_region.c).
*/
#define CAV_REGIONS (2 * LSTUB__CAV_TAPS)
#define CAV_SHARED  12              /* most slabs of one                                            */
typedef struct cav_region {
    int    first, last;             /* slabs, of each barrel                                        */
    int    ref;                     /* slab whose medium and vias the common wave has               */
    double reach, height;           /* height INFINITY: no plane on one side                        */
} cav_region;

struct lstub__cavity {
    void  (*release)(void *, void *);
    void   *user;
    int     barrels, slabs, openings, kernels, media, outer, rim_sets, answers;
    int     feed, lid_top;          /* slabs of the feed; a lid over a free end */
    int     taps[2], cap_tap[2], cap_opening[2];
    int     half_opening[2], half_medium;
    double  radius;                 /* of the barrel                                                */
    double  port_log;               /* ln(antipad/barrel) of the first opening                      */
    int     port_medium;
    double  feed_length;
    const cav_slab    *slab;        /* top and bottom are openings here; one barrel after the other */
    const cav_opening *opening;
    const cav_kernel  *kernel;
    const double      *half[2], *half_top[2];  /* half-space: [4][cells][cells], factors of 1, k^2, k^4, and -j k^3 */
    lstub__cav_returns returns;         /* its vias lie in the same block                               */
    cav_answer answer[CAV_ANSWERS];
    cav_tap tap[2][LSTUB__CAV_TAPS];
    cav_region region[CAV_REGIONS];
    int     regions;
    double *plane_c;                    /* with flux: F over the Dk above, of each plane from the top, its opening seen as a whole */
    int     planes;
    double  ratio[LSTUB__CAV_MEDIA];
};

/* Fills plane_c where a flux threads the openings. 0, or as lstub__cavity_compile. */
int cav_flux_prepare(lstub__cavity *m, const lstub__cav_medium *medium, void *scratch);
size_t cav_flux_scratch(void);
/* Coefficients of a face's cells on its rims. */
void cav_cell_coefficients(const cav_face *face, double *c);
/* Half-space below a face: out[4][cells][cells]. */
void cav_half_space(const cav_face *face, const double *c, double *out);

/*
** What answers waves K0(kappa rho) of the barrels: gamma[2 q + p] is the amplitude of I0(kappa rho) at barrel q for a wave of
** barrel p; a pair in one mode has it all in gamma[0]. flux: the squared shape J of the axial flux, m^2. NaN: singular.
*/
typedef struct cav_echo { cplx gamma[4], flux; } cav_echo;
void cav_ring(const lstub__cav_returns *returns, unsigned vias, int barrels, double radius, cplx kappa, int two, cav_echo *out);

/* What the planes' edges send back to (x, y) of a wave K0(kappa rho) from (xs, ys). */
cplx cav_edge(const lstub__cav_returns *returns, cplx kappa, double x, double y, double xs, double ys);

#endif
