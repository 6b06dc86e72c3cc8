/* Which jobs of a board are alike: a table of cases by what is in the structs, not where they lie. */
#ifndef LSTUB_ALIKE_H
#define LSTUB_ALIKE_H

#include "criteria/criteria.h"

typedef struct lstub__key {        /* a job with its pointers taken out of the structs */
    lstub_via      via;            /* pointers zeroed */
    const lstub_via *arrays;       /* the caller's, for its arrays */
    lstub_signal   signal;
    lstub_criteria criteria;
    uint64_t       hash;
} lstub__key;

void lstub__key_make(lstub__key *key, const lstub_via *via, const lstub_job *job);

typedef struct lstub__table {
    uint32_t *slot;                /* number + 1, 0: empty; open addressing */
    size_t    size;                /* a power of two */
    uint64_t *hash;                /* [number] */
    size_t   *job;                 /* [number]: a job that shows it */
    uint32_t  count;
} lstub__table;

int32_t lstub__table_make(lstub__table *table, const lstub_allocator *alloc, size_t jobs, lstub_error *err);
void    lstub__table_free(lstub__table *table, const lstub_allocator *alloc);

/* Makes the key of job number `job` once more; `via` is room for what its pointers need. */
typedef void lstub__rekey(const void *context, size_t job, lstub_via *via, lstub__key *key);
/* The number that a job belongs to, *fresh if it is the first of it. */
uint32_t lstub__table_find(lstub__table *table, const lstub__key *key, size_t job, lstub__rekey *rekey, const void *context, int *fresh);

#endif
