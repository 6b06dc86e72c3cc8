/* Inside the cavity model: slabs, faces, kernels. */
#ifndef LSTUB_CAVITY_PARTS_H
#define LSTUB_CAVITY_PARTS_H

#include "base/base.h"
#include "model/cavity.h"

#define CAV_DEGREE 20               /* most terms of a Chebyshev series, less one                       */
#define CAV_FEED   3                /* slabs that the feeding coaxial line is cut into                  */

/*
** A face between two slabs: rims x[0] < x[1] ... of its annuli. `refine` neighbouring annuli share one unknown, their
** common voltage; within it the field is sum of s/rho, s fixed by the static field. An annulus of voltage 1 from x_i
** to x_(i+1) is on the rims (-1, +1)/ln(x_(i+1)/x_i): a reaction of two annuli is the second difference of a function
** F(x, y) of two rims, so all a face needs are coefficients on its rims.
*/
typedef struct cav_face {
    int    points, cells, refine;
    double plain;                               /* 0 .. 1: how much of plain 1/rho is in that shape      */
    int    shaped;                              /* first cells that take the static shape               */
    double x[LSTUB__CAV_POINTS];
    double log_x[LSTUB__CAV_POINTS];
    double share[LSTUB__CAV_POINTS];            /* of each fine annulus in its cell's voltage            */
} cav_face;

typedef struct cav_slab {
    double h, r_in, r_out;                      /* r_in 0: no barrel; r_out: wall, where outer says so   */
    int    outer;                               /* LSTUB__CAV_OPEN ...                                  */
    int    medium, fill;                        /* fill -1: no hole                                     */
    double hole;
    int    top, bottom;                         /* faces; -1: copper without opening                    */
    int    copper;                              /* within a copper layer: its faces share their shape   */
    int    plane;                               /* its lower face is the (lower) face of a plane        */
    int    tap;                                 /* number of the trace that leaves at its lower face, -1 */
    unsigned vias;                              /* which return vias join the planes around it, a bit each, and CAV_BEYOND */
    int    region;                              /* number of the space between planes with traces it is part of, -1 */
    int    answer;                              /* number of (vias, barrel, medium), of what answers its waves */
    int    kernel;
    int    metal_top, metal_bottom, metal_wall; /* of the planes above and below and of the tube around; -1: none */
} cav_slab;

/* Modes n >= first of a slab, per 1/h and unit permittivity, as Chebyshev series in u = eps_z k0^2 over 0 .. u_max. */
typedef struct cav_series {
    int     points, pairs, degree, first;
    double  u_max;
    double *even, *odd;                         /* [degree + 1][pairs]                                  */
    double *low_even, *low_odd;                 /* [pairs]: the modes below `first`, static             */
} cav_series;

typedef struct cav_span { int same, top_points; const double *x, *log_x; int points; } cav_span;

/* Everything one barrel is cut into, on the way to a compiled model. */
#define CAV_SLABS 400
typedef struct cav_mesh {
    int barrels, slabs, faces;                  /* slabs: of each barrel                                */
    int feed;                                   /* slabs of the feed, of each barrel: CAV_FEED or 0     */
    int open_top;                               /* a half-space above                                   */
    cav_slab slab[CAV_SLABS];                   /* one barrel after the other                           */
    cav_face *face;                             /* [CAV_SLABS + 4] */
    double feed_height;
    int first_face[2];                          /* of each barrel: feed's opening (the next: its TEM wave), or the face
                                                   below the upper half-space; -1: a lid on top         */
    int cap_tap[2];                             /* trace that leaves at that face, -1                   */
    int half_face[2];                           /* face that looks into the lower half-space, or -1     */
} cav_mesh;

/* Of a slab beyond the outermost plane: no vias, no edges. */
#define CAV_BEYOND 0x80000000u

/* Return vias that join two planes, a bit each; CAV_BEYOND where there is none on one side (-INFINITY, INFINITY). */
unsigned cav_joining(const lstub__cav_returns *returns, double above, double below);

size_t cav_mesh_scratch(void);
int  cav_mesh_make(const lstub__cav_barrel *barrel, int cells, int refine, void *scratch, cav_mesh *mesh);

/* Sums of the modes of one slab over all pairs of rims x[points]. ratio: in-plane over through-plane Dk, q: permittivity
** of the fill over that of the slab (hole 0: none). Fills series (even, odd allocated by the caller). */
void cav_modes_plan(const cav_slab *slab, double ratio, double u_top, cav_series *series);
void cav_modes_sum(const cav_slab *slab, double ratio, double q, const double *x, const double *log_x, int points,
                   const cav_series *series, double *scratch);
size_t cav_modes_scratch(int points);
/* What one mode of real radial wave number has at the rims: e1, e2 scaled, lambda. */

#endif
