/* A via resolved against its stackup: what lies where along the barrel. */
#ifndef LSTUB_VIA_H
#define LSTUB_VIA_H

#include "stackup/stackup.h"

typedef struct lstub__ends {           /* depths of a barrel's ends, back-drills made                             */
    double top, bottom;
    int    top_drilled, bottom_drilled;
} lstub__ends;

typedef struct lstub__via {
    lstub_via in;                      /* the caller's, defaults in place; its arrays are the caller's        */
    const lstub_stackup *stackup;
    int32_t first, last;               /* highest and lowest layer that connects                              */
    lstub__ends ends, partner;         /* of the barrel, and of the partner in a pair                         */
    int     unequal;                   /* these differ                                                        */
} lstub__via;

int32_t lstub__via_take(lstub__via *via, const lstub_stackup *stackup, const lstub_via *theirs, lstub_error *err);

/* Whether the counts of a via's arrays can be true. */
int32_t lstub__via_counts(const lstub_via *in, lstub_error *err);

/* Diameters on a copper layer of the span; 0: none. */
double lstub__via_pad(const lstub__via *via, int32_t layer);
double lstub__via_antipad(const lstub__via *via, int32_t layer);
double lstub__via_clear(const lstub__via *via, int32_t layer);   /* -1: not known */
int    lstub__via_connects(const lstub__via *via, int32_t layer);

/* The stub on one side, between the outermost connecting layer and the end of the barrel; 0 where there is none. */
int lstub__via_stub(const lstub__via *via, int32_t side, lstub_stub *stub);

#endif
