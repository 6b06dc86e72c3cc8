/* What the reader asks of the rules. Every call accepts rules == NULL: no rules at all. */
#ifndef LSTUB_IPC2581_RULES_H
#define LSTUB_IPC2581_RULES_H

#include "libstub_ipc2581.h"

#define LSTUB__SUFFIX_MAX 63   /* bytes of the ending of a paired net: strlen(net) + 64 always hold the partner */

/*
** 1 if `net` has one of the endings of a `pair` rule: partner gets the name of the other net (which may not be on the
** board), *kind LSTUB_PAIR_SEPARATE or LSTUB_PAIR_SHARED, 0 if the rule does not say. 0: no such rule, or partner is
** too small. A net without a name has no partner.
*/
int lstub__rules_pair(const lstub_rules *rules, const char *net, char *partner, size_t bytes, int32_t *kind);

/* 1 if plated holes of `net` carry the return, of vias at most *within (m) away. */
int lstub__rules_return(const lstub_rules *rules, const char *net, double *within);

/* Least barrel to keep for the press-fit pin in that pad stack, m; 0: no pin. */
double lstub__rules_pin(const lstub_rules *rules, const char *padstack);

typedef struct lstub__rules_defaults {   /* NaN: not given */
    double dk, loss_tangent, in_plane_ratio;
    double antipad;                      /* m */
} lstub__rules_defaults;

const lstub__rules_defaults *lstub__rules_defaults_of(const lstub_rules *rules);   /* never null */

/* The same rules in a handle of their own, for a board that outlives what it was read with. */
int32_t lstub__rules_copy(const lstub_rules *rules, const lstub_allocator *allocator, lstub_rules **out, lstub_error *err);

/* Whether all of text fits pattern: * stands for any text, ? for one character (of UTF-8), case counts. */
int lstub__glob(const char *pattern, const char *text);

#endif
