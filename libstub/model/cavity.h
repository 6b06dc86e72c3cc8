/*
** The cavity model of a barrel: radial modes in every slab between two levels, matched on annuli.
**
** A barrel is described downwards: a stub from the copper layer it hangs on (mirror it for a stub at the top), a whole
** transition from the opening that feeds it or from its open upper end, with traces that leave at taps. All lengths
** are radii and heights in metres; permittivities are given per frequency, one complex number a medium, so that
** the compiled model does not depend on the law of dispersion; in-plane over through-plane is fixed.
*/
#ifndef LSTUB_CAVITY_H
#define LSTUB_CAVITY_H

#include <stddef.h>

#include "num/cplx.h"

#define LSTUB__CAV_CELLS    24      /* most annuli of one aperture                                      */
#define LSTUB__CAV_POINTS   42      /* most rims of annuli, refined                                     */
#define LSTUB__CAV_MEDIA    64
#define LSTUB__CAV_METALS   8
#define LSTUB__CAV_VIAS     24      /* most return vias at given positions                              */

typedef struct lstub__cav_medium {
    double dk;                      /* through-plane, at the reference: sets ranges only; > 0           */
    double ratio;                   /* in-plane over through-plane                                      */
} lstub__cav_medium;

typedef struct lstub__cav_copper {
    double thickness;               /* >= 0                                                             */
    double antipad;                 /* radius; 0: no plane at the via on this layer                     */
    double pad;                     /* radius; 0: none                                                  */
    int    medium;                  /* what fills the layer where there is no copper                    */
    int    metal;                   /* of the plane                                                     */
} lstub__cav_copper;

typedef struct lstub__cav_layer {
    double thickness;
    int    medium;
} lstub__cav_layer;

typedef struct lstub__cav_via {
    double x, y, radius;
    double from, to;                /* depths that it joins; both 0: all                                */
} lstub__cav_via;

typedef struct lstub__cav_returns {     /* what answers the barrel's radial wave                             */
    const lstub__cav_via *via;          /* about the barrel's axis                                           */
    int    vias;
    int    even;                        /* > 0: via[0] alone is given, on the x axis, and stands for so many */
    double pitch, sign;                 /* an equal barrel at (pitch, 0), driven with this sign; pitch 0: none. Sign 0: a
                                           barrel of its own (partner below)                              */
    int    flux;                        /* a field across the barrel threads the openings (cavity_flux.c)  */
    int    slot;                        /* ... which are slots around both barrels                        */
    double opening, height;             /* ... their mean radius (of a slot's round ends), mean plate distance */
    double edge[4];                     /* distances to straight edges of the planes towards -x, +x, -y, +y; 0: none */
    int    shorted;                     /* these are joined                                                */
    double pull;                        /* F, of the partner's end pad on this one's, counted at the last plane */
} lstub__cav_returns;

#define LSTUB__CAV_OPEN 0           /* plate pairs without edge: the radial wave leaves                 */
#define LSTUB__CAV_WALL 1           /* closed wall                                                      */
#define LSTUB__CAV_RING 2           /* return vias, a partner                                           */

#define LSTUB__CAV_HALFSPACE 0
#define LSTUB__CAV_LID       1

#define LSTUB__CAV_FED  0           /* the opening of copper[0] is fed by a coaxial line: depth 0 is its lower face */
#define LSTUB__CAV_FREE 1           /* the barrel's upper end is open: depth 0 is the upper face of copper[0]       */

#define LSTUB__CAV_TAPS 4

typedef struct lstub__cav_cut {     /* where one barrel begins and ends, and where its traces leave      */
    double begin;                   /* depth; 0: at the top                                             */
    double end;                     /* depth where a drilled barrel ends; 0: at the last lower face      */
    int    taps;
    double tap[LSTUB__CAV_TAPS];    /* depths, falling on a pad's middle or within a dielectric; rising   */
} lstub__cav_cut;

typedef struct lstub__cav_barrel {
    double radius;
    const lstub__cav_copper *copper;    /* [0]: the layer the stub hangs on or the barrel begins on       */
    const lstub__cav_layer  *layer;     /* layer[k] lies between copper[k] and copper[k + 1]             */
    int    layers;                      /* copper has one more                                           */
    int    media;
    const lstub__cav_medium *medium;
    int    outer;                       /* LSTUB__CAV_OPEN ...                                           */
    double wall;                        /* radius                                                        */
    lstub__cav_returns returns;
    double end;                         /* depth where a drilled barrel ends; 0: at the last lower face  */
    double hole;                        /* radius of the drilled hole                                    */
    int    fill;                        /* medium in it; -1: that of each layer                          */
    int    below;                       /* LSTUB__CAV_HALFSPACE ...                                      */
    int    below_medium;
    double lid;                         /* height of the space under a lid                               */
    int    top;                         /* LSTUB__CAV_FED ...; what lies above a free end is as below     */
    double begin;                       /* as in lstub__cav_cut                                           */
    int    taps;
    double tap[LSTUB__CAV_TAPS];
    const lstub__cav_cut *partner;      /* the other barrel at (pitch, 0) in the same cascade; null: none */
} lstub__cav_barrel;

typedef struct lstub__cav_options {
    int    cells;                   /* annuli per aperture; 0: 4                                        */
    int    refine;                  /* parts of an annulus that shape its field; 0: 2                   */
    double f_max;                   /* Hz, highest frequency wanted; 0: 110e9                           */
} lstub__cav_options;

typedef struct lstub__cavity lstub__cavity;

/* 0, or: -1 no memory, -2 beyond what the arrays hold (see the limits above). Geometry is checked by the caller. */
int  lstub__cavity_compile(const lstub__cav_barrel *barrel, const lstub__cav_options *options,
                           void *(*allocate)(void *, size_t), void (*release)(void *, void *), void *user,
                           lstub__cavity **out);
void lstub__cavity_destroy(lstub__cavity *cavity);         /* null is allowed */

/* Highest frequency at which the series of the compiled model hold, Hz: 1.1 times f_max, less where a slab is thicker than
** 0.7 wavelengths. Above it results are wrong without any sign: the caller must compare. */
double lstub__cavity_limit(const lstub__cavity *cavity, const cplx *eps);

/* Input impedance of the TEM wave in the opening of copper[0], at z = 0. eps[media]: complex, through-plane. Perfect metal. */
cplx lstub__cavity_zin(const lstub__cavity *cavity, double freq, const cplx *eps);

/*
** Open-circuit impedances of all ports, z[ports][ports]: of each barrel the feed, where it is fed, then its taps. The feed's are
** those of the TEM wave in the opening at depth 0, a tap's those at the pad's rim, where the trace's own line begins. surface: impedance
** of each metal, ohm per square, [0] that of the barrel; null: perfect. Returns the number of ports, -1 (and NaN) where a matrix is singular.
*/
#define LSTUB__CAV_PORTS (2 * (LSTUB__CAV_TAPS + 1))
int lstub__cavity_ports(const lstub__cavity *cavity, double freq, const cplx *eps, const cplx *surface, cplx *z);

#endif
