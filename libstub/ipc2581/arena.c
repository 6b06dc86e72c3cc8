#include "ipc2581/arena.h"

#include "base/base.h"

#include <string.h>

#define BLOCK_BYTES 32768u
#define ALIGN 16u

typedef struct block {
    struct block *next;
    size_t used, room;         /* of the bytes behind this header */
} block;

#define HEADER ((sizeof(block) + ALIGN - 1) / ALIGN * ALIGN)

struct board_arena {
    lstub_allocator alloc;
    block *last;               /* the one being filled; larger ones stand behind it */
};

struct board_arena *lstub__arena_create(const lstub_allocator *allocator, lstub_error *err)
{
    struct board_arena *arena = lstub__new(allocator, 1, sizeof *arena, err);
    if (arena != NULL)
        arena->alloc = *allocator;
    return arena;
}

void lstub__arena_destroy(struct board_arena *arena)
{
    if (arena == NULL)
        return;
    lstub_allocator alloc = arena->alloc;
    for (block *b = arena->last, *next; b != NULL; b = next) {
        next = b->next;
        lstub__free(&alloc, b);
    }
    lstub__free(&alloc, arena);
}

void *lstub__arena_take(struct board_arena *arena, size_t bytes, lstub_error *err)
{
    block *b = arena->last;
    if (bytes > SIZE_MAX / 2) {
        lstub__fail(err, LSTUB_E_MEMORY, "allocator", -1, "out of memory: %lu bytes", (unsigned long)bytes);
        return NULL;
    }
    bytes = (bytes + ALIGN - 1) / ALIGN * ALIGN;
    if (b == NULL || b->room - b->used < bytes) {
        size_t room = bytes > BLOCK_BYTES ? bytes : BLOCK_BYTES;
        b = lstub__new(&arena->alloc, 1, HEADER + room, err);
        if (b == NULL)
            return NULL;
        b->room = room;
        if (bytes > BLOCK_BYTES / 2 && arena->last != NULL) {   /* go on filling the old one */
            b->next = arena->last->next;
            arena->last->next = b;
        } else {
            b->next = arena->last;
            arena->last = b;
        }
    }
    void *memory = (char *)b + HEADER + b->used;
    b->used += bytes;
    return memory;
}

/* Strings need no alignment, but sharing the blocks is worth more than the few bytes. */
const char *lstub__arena_string(struct board_arena *arena, const char *text, lstub_error *err)
{
    size_t bytes = strlen(text) + 1;
    char *copy = lstub__arena_take(arena, bytes, err);
    return copy != NULL ? memcpy(copy, text, bytes) : NULL;
}

/* ---- names ------------------------------------------------------------------------------------- */

static uint64_t hash_of(const char *text)
{
    uint64_t h = UINT64_C(14695981039346656037);   /* FNV-1a */
    for (; *text != '\0'; text++)
        h = (h ^ (unsigned char)*text) * UINT64_C(1099511628211);
    return h ^ h >> 32;
}

void lstub__names_init(lstub__names *names, struct board_arena *arena, const lstub_allocator *allocator)
{
    memset(names, 0, sizeof *names);
    names->arena = arena;
    names->alloc = allocator;
}

void lstub__names_clear(lstub__names *names)
{
    if (names->alloc != NULL) {
        lstub__free(names->alloc, names->slot);
        lstub__free(names->alloc, names->text);
    }
    memset(names, 0, sizeof *names);
}

/* The slot that holds text, or the free one where it belongs. */
static size_t place(const lstub__names *names, const char *text)
{
    size_t i = (size_t)hash_of(text) & (names->slots - 1);
    while (names->slot[i] != 0 && strcmp(names->text[names->slot[i] - 1], text) != 0)
        i = (i + 1) & (names->slots - 1);
    return i;
}

int32_t lstub__names_find(const lstub__names *names, const char *text)
{
    return names->slots == 0 ? -1 : names->slot[place(names, text)] - 1;
}

static int32_t grow_names(lstub__names *names, lstub_error *err)
{
    size_t slots = names->slots ? 2 * names->slots : 64;
    int32_t *slot = lstub__new(names->alloc, slots, sizeof *slot, err);
    const char **text = slot == NULL ? NULL : lstub__new(names->alloc, slots / 2, sizeof *text, err);
    if (text == NULL) {
        lstub__free(names->alloc, slot);
        return LSTUB_E_MEMORY;
    }
    if (names->count > 0)
        memcpy(text, names->text, (size_t)names->count * sizeof *text);
    lstub__free(names->alloc, names->slot);
    lstub__free(names->alloc, names->text);
    names->slot = slot;
    names->slots = slots;
    names->text = text;
    for (int32_t i = 0; i < names->count; i++)
        slot[place(names, text[i])] = i + 1;
    return LSTUB_OK;
}

int32_t lstub__names_add(lstub__names *names, const char *text, lstub_error *err)
{
    int32_t found = lstub__names_find(names, text);
    if (found >= 0)
        return found;
    if (names->count >= INT32_MAX / 4)
        return lstub__fail(err, LSTUB_E_MEMORY, "path", -1, "more than %ld names", (long)names->count);
    if (2 * ((size_t)names->count + 1) > names->slots && grow_names(names, err) < 0)
        return LSTUB_E_MEMORY;
    const char *copy = lstub__arena_string(names->arena, text, err);
    if (copy == NULL)
        return LSTUB_E_MEMORY;
    names->text[names->count] = copy;
    names->slot[place(names, text)] = names->count + 1;
    return names->count++;
}

/* ---- lists ------------------------------------------------------------------------------------- */

void lstub__list_init(lstub__list *list, const lstub_allocator *allocator, size_t item_bytes)
{
    memset(list, 0, sizeof *list);
    list->alloc = allocator;
    list->bytes = item_bytes;
}

void lstub__list_clear(lstub__list *list)
{
    if (list->alloc != NULL)
        lstub__free(list->alloc, list->items);
    list->items = NULL;
    list->count = list->room = 0;
}

void *lstub__list_add(lstub__list *list, lstub_error *err)
{
    if (list->count == list->room) {
        size_t room = list->room ? list->room + list->room / 2 : 16;
        void *items = lstub__new(list->alloc, room, list->bytes, err);
        if (items == NULL)
            return NULL;
        if (list->count > 0)
            memcpy(items, list->items, list->count * list->bytes);
        lstub__free(list->alloc, list->items);
        list->items = items;
        list->room = room;
    }
    return (char *)list->items + list->count++ * list->bytes;
}
