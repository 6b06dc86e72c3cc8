/* A stub as the cavity model and the ladder see it: radii and heights along one arm of a via, cut to a length. */
#ifndef LSTUB_BARREL_H
#define LSTUB_BARREL_H

#include "material/conductor.h"
#include "model/cavity.h"
#include "model/site.h"

typedef struct lstub__barrel {
    lstub_allocator alloc;
    lstub__cav_barrel shape;               /* its arrays follow                                             */
    lstub__cav_copper copper[LSTUB_LAYERS_MAX / 2 + 2];
    lstub__cav_layer  layer[LSTUB_LAYERS_MAX / 2 + 1];
    lstub__cav_medium medium[LSTUB__CAV_MEDIA];
    lstub__wideband   law[LSTUB__CAV_MEDIA];  /* of each medium over frequency                              */
    lstub__cav_via    via[LSTUB__CAV_VIAS];
    lstub__cav_cut    partner;
    int media;
    lstub_conductor conductor[LSTUB__CAV_METALS];   /* whole barrels: [0] of the barrel                      */
    int metals;
    const lstub_stackup *stackup;          /* while it is made                                              */
    double origin;                         /* depth in the board of its depth 0                             */
    int    up;                             /* an arm that runs upwards                                      */
} lstub__barrel;

typedef struct lstub__passage {            /* how a signal passes a whole barrel                            */
    int     fed;                           /* through the opening of the first layer, by a coaxial line ...   */
    double  feed_dk;                       /* ... filled with this                                          */
    int     removed;                       /* the barrel ends on its outermost connecting layers            */
    double  sign;                          /* of a pair: -1, 1: one mode; 0: both barrels in one model        */
    int     taps;
    int32_t layer[LSTUB__CAV_TAPS];        /* where traces leave, downwards                                 */
} lstub__passage;

/* Made for one branch, freed with it. Names what neither tier can compute: LSTUB_E_UNSUPPORTED. */
int32_t lstub__barrel_make(lstub__barrel **out, const lstub__site *site, int arm, double length, lstub_error *err);
int32_t lstub__barrel_whole(lstub__barrel **out, const lstub__site *site, const lstub__passage *way, lstub_error *err);
/* Whether a pair stands in the middle of its planes: else it has no odd and even mode. */
int     lstub__edges_even(const lstub_via *in);
/* The same of its edges and its return vias at given places. */
int     lstub__pair_even(const lstub_via *in);
void    lstub__barrel_free(lstub__barrel *barrel);
/* Impedance of its metals at f. */
void    lstub__barrel_metals(const lstub__barrel *barrel, double f, cplx *surface);
/* Complex through-plane permittivity of its media at f. */
void    lstub__barrel_media(const lstub__barrel *barrel, double f, cplx *eps);

#endif
