/* A stub as the cavity model and the ladder see it: radii and heights along one arm of a via, cut to a length. */
#ifndef LSTUB_BARREL_H
#define LSTUB_BARREL_H

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
    int media;
} lstub__barrel;

/* Made for one branch, freed with it. Names what neither tier can compute: LSTUB_E_UNSUPPORTED. */
int32_t lstub__barrel_make(lstub__barrel **out, const lstub__site *site, int arm, double length, lstub_error *err);
void    lstub__barrel_free(lstub__barrel *barrel);
/* Complex through-plane permittivity of its media at f. */
void    lstub__barrel_media(const lstub__barrel *barrel, double f, cplx *eps);

#endif
