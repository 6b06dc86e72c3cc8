/* What rules are inside: filled by rules_parse.c, asked by rules.c. */
#ifndef LSTUB_IPC2581_RULES_DATA_H
#define LSTUB_IPC2581_RULES_DATA_H

#include "ipc2581/rules.h"

typedef struct signal_rule {
    const char    *name;
    int64_t        line;
    lstub_signal   signal;
    lstub_criteria criteria;
} signal_rule;

typedef struct net_rule {
    const char *pattern, *name;   /* name of the signal, "none" */
    int64_t     line;
    int32_t     signal;           /* -1: none */
} net_rule;

typedef struct pair_rule {
    const char *ending[2];
    int32_t     kind;             /* LSTUB_PAIR_..., 0: not said */
} pair_rule;

typedef struct length_rule {      /* returns, pin */
    const char *pattern;
    double      length;           /* m */
} length_rule;

struct lstub_rules {
    lstub_allocator alloc;
    char  *source;                /* as given, for copies */
    size_t bytes;
    char  *words;                 /* the same cut into words: every name above points here */
    signal_rule *signals;
    net_rule    *nets;
    pair_rule   *pairs;
    length_rule *returns, *pins;
    int32_t signal_count, net_count, pair_count, return_count, pin_count;
    lstub__rules_defaults defaults;
    lstub_capability      capability;
    double               *depths;
};

/* Reads rules->source into the rest of rules. */
int32_t lstub__rules_read(lstub_rules *rules, lstub_error *err);

#endif
