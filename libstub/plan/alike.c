#include "plan/alike.h"

#include <string.h>

static uint64_t mix_in(uint64_t hash, const void *data, size_t bytes)
{
    const unsigned char *p = data;
    uint64_t word = 0;
    for (; bytes >= sizeof word; bytes -= sizeof word, p += sizeof word) {
        memcpy(&word, p, sizeof word);
        hash = (hash ^ word) * 0x9e3779b97f4a7c15u;
        hash ^= hash >> 29;
    }
    for (; bytes > 0; bytes--, p++)
        hash = (hash ^ *p) * 0x9e3779b97f4a7c15u;
    return hash;
}

#define ARRAYS 8                   /* that a via points to */

typedef struct array { const void *data; size_t bytes; } array;

static void arrays_of(const lstub_via *via, array *out)
{
    array all[ARRAYS] = {{via->pads, via->pad_count * sizeof *via->pads},
                    {via->antipads, via->antipad_count * sizeof *via->antipads},
                    {via->clear, via->clear_count * sizeof *via->clear},
                    {via->connects, via->connect_count * sizeof *via->connects},
                    {via->backdrills, via->backdrill_count * sizeof *via->backdrills},
                    {via->return_xy, via->return_count < 1 ? 0 : 2 * (size_t)via->return_count * sizeof *via->return_xy},
                    {via->return_spans, via->return_count < 1 ? 0 : 2 * (size_t)via->return_count * sizeof *via->return_spans},
                    {via->partner_backdrills, via->partner_backdrill_count * sizeof *via->partner_backdrills}};
    memcpy(out, all, sizeof all);
}

/* Null arrays with a count are left for lstub__via_take to refuse. */
void lstub__key_make(lstub__key *k, const lstub_via *via, const lstub_job *job)
{
    array list[ARRAYS];
    memset(k, 0, sizeof *k);
    k->via = *via;
    k->via.pads = k->via.antipads = k->via.clear = NULL;
    k->via.connects = NULL;
    k->via.backdrills = NULL;
    k->via.return_xy = NULL;
    k->via.return_spans = NULL;
    k->via.partner_backdrills = NULL;
    k->arrays = via;
    if (job->signal != NULL)       /* wrong sizes come out when the case is decided */
        lstub__take(&k->signal, sizeof k->signal, job->signal, sizeof k->signal, "signal", NULL);
    if (job->criteria != NULL)
        lstub__take(&k->criteria, sizeof k->criteria, job->criteria, sizeof k->criteria, "criteria", NULL);
    uint64_t hash = mix_in(14695981039346656037u, &k->via, sizeof k->via);
    hash = mix_in(hash, &k->signal, sizeof k->signal);
    hash = mix_in(hash, &k->criteria, sizeof k->criteria);
    arrays_of(via, list);
    for (int i = 0; i < ARRAYS; i++)
        if (list[i].data != NULL)
            hash = mix_in(hash, list[i].data, list[i].bytes);
    k->hash = hash;
}

static int same(const lstub__key *a, const lstub__key *b)
{
    array x[ARRAYS], y[ARRAYS];
    if (a->hash != b->hash || memcmp(&a->via, &b->via, sizeof a->via) != 0 || memcmp(&a->signal, &b->signal, sizeof a->signal) != 0
        || memcmp(&a->criteria, &b->criteria, sizeof a->criteria) != 0)
        return 0;
    arrays_of(a->arrays, x);
    arrays_of(b->arrays, y);
    for (int i = 0; i < ARRAYS; i++)
        if ((x[i].data == NULL) != (y[i].data == NULL) || (x[i].data != NULL && memcmp(x[i].data, y[i].data, x[i].bytes) != 0))
            return 0;
    return 1;
}

int32_t lstub__table_make(lstub__table *table, const lstub_allocator *alloc, size_t jobs, lstub_error *err)
{
    for (table->size = 16; table->size < 2 * jobs; table->size *= 2)
        continue;
    table->count = 0;
    if ((table->slot = lstub__new(alloc, table->size, sizeof *table->slot, err)) == NULL
        || (table->hash = lstub__new(alloc, jobs, sizeof *table->hash, err)) == NULL
        || (table->job = lstub__new(alloc, jobs, sizeof *table->job, err)) == NULL)
        return LSTUB_E_MEMORY;
    return LSTUB_OK;
}

void lstub__table_free(lstub__table *table, const lstub_allocator *alloc)
{
    lstub__free(alloc, table->slot);
    lstub__free(alloc, table->hash);
    lstub__free(alloc, table->job);
}

uint32_t lstub__table_find(lstub__table *table, const lstub__key *key, size_t job, lstub__rekey *rekey, const void *context, int *fresh)
{
    size_t at = (size_t)key->hash & (table->size - 1);
    *fresh = 0;
    for (; table->slot[at] != 0; at = (at + 1) & (table->size - 1)) {
        uint32_t number = table->slot[at] - 1;
        lstub_via via;
        lstub__key other;
        if (table->hash[number] != key->hash)
            continue;
        rekey(context, table->job[number], &via, &other);
        if (same(key, &other))
            return number;
    }
    *fresh = 1;
    table->slot[at] = table->count + 1;
    table->hash[table->count] = key->hash;
    table->job[table->count] = job;
    return table->count++;
}
