/* Memory for the many small things of a board: blocks given back all at once, names kept once, growing arrays. */
#ifndef LSTUB_IPC2581_ARENA_H
#define LSTUB_IPC2581_ARENA_H

#include "libstub.h"

/* Null, or a negative result, on every failure: out of memory, with err filled. */

struct board_arena *lstub__arena_create(const lstub_allocator *allocator, lstub_error *err);
void                lstub__arena_destroy(struct board_arena *arena);               /* null is allowed      */
void               *lstub__arena_take(struct board_arena *arena, size_t bytes, lstub_error *err);  /* zeroed */
const char         *lstub__arena_string(struct board_arena *arena, const char *text, lstub_error *err);

/* Texts, each kept once, numbered from 0 in the order they came. */
typedef struct lstub__names {
    struct board_arena *arena;
    const lstub_allocator *alloc;
    const char **text;
    int32_t *slot;             /* open addressing: number + 1, 0 where free */
    size_t   slots;            /* a power of two, or 0 */
    int32_t  count;
} lstub__names;

void        lstub__names_init(lstub__names *names, struct board_arena *arena, const lstub_allocator *allocator);
void        lstub__names_clear(lstub__names *names);
int32_t     lstub__names_add(lstub__names *names, const char *text, lstub_error *err);   /* its number, < 0: status */
int32_t     lstub__names_find(const lstub__names *names, const char *text);              /* its number, -1: none    */

/* An array that grows. Items move: keep numbers, not pointers. */
typedef struct lstub__list {
    const lstub_allocator *alloc;
    void  *items;
    size_t count, room, bytes;
} lstub__list;

void  lstub__list_init(lstub__list *list, const lstub_allocator *allocator, size_t item_bytes);
void  lstub__list_clear(lstub__list *list);
void *lstub__list_add(lstub__list *list, lstub_error *err);                               /* a zeroed item */
#define LSTUB__ITEM(list, type, index) (&((type *)(list).items)[index])

#endif
