/* The made ladder: one block of memory, read only from then on. */
#ifndef LSTUB_LADDER_MODEL_H
#define LSTUB_LADDER_MODEL_H

#include "model/ladder.h"

#define LADDER_LOOPS LSTUB__CAV_MEDIA

/* u = eps k0^2; admittances are in units of 2 pi jw eps0. */
typedef struct ladder_step {        /* a slab along the barrel                                                        */
    double t[2], b[2], c[2];        /* of its faces, top, bottom, cross: eps (t[0] + u t[1])                          */
    double top[2], bottom[2];       /* voltage of mode 0 on them: 1 - u top[0] + u^2 top[1]                           */
    double h;
    double log0, log1;              /* 1/R of mode 0: log0 + u log1 ...                                               */
    int    loop;                    /* ... and that of this loop; -1: none, the slab lies in an antipad                */
    int    medium;
} ladder_step;

typedef struct ladder_end {         /* capacitance below the barrel: eps (c[0] + u (c[1] + c[2]/R))                   */
    double c[3];
    int    medium, loop;
} ladder_end;

typedef struct ladder_loop {        /* where the current of mode 0 returns                                            */
    unsigned vias;                  /* a bit for each that joins the planes                                           */
    int      medium;
} ladder_loop;

struct lstub__ladder {
    size_t  bytes;
    void  (*release)(void *, void *);
    void   *user;
    int     steps, ends, loops, outer, feed_medium;
    double  radius, wall;
    double  feed;                   /* what the first opening adds to the coaxial line above it                       */
    lstub__cav_returns returns;
    ladder_loop loop[LADDER_LOOPS];
    const ladder_step *step;        /* [steps], from the top                                                          */
    const ladder_end  *end;         /* [ends], by medium and loop                                                     */
};

#endif
