#include "ipc2581/notice.h"

#include <stdarg.h>

typedef struct entry {
    int     kind;
    int32_t key;
    lstub_notice notice;
} entry;

void lstub__notices_init(lstub__notices *notices, struct board_arena *arena, const lstub_allocator *allocator, lstub_error *err)
{
    notices->arena = arena;
    notices->status = LSTUB_OK;
    notices->err = err;
    lstub__list_init(&notices->list, allocator, sizeof(entry));
}

void lstub__notices_clear(lstub__notices *notices)
{
    lstub__list_clear(&notices->list);
}

void lstub__note(lstub__notices *notices, int32_t severity, int kind, int32_t key, int64_t line, const char *format, ...)
{
    char message[320];
    va_list args;
    for (size_t i = 0; i < notices->list.count; i++) {
        entry *e = LSTUB__ITEM(notices->list, entry, i);
        if (e->kind == kind && e->key == key) {
            e->notice.count++;
            return;
        }
    }
    va_start(args, format);
    lstub__vformat(message, sizeof message, format, args);
    va_end(args);
    entry *e = lstub__list_add(&notices->list, notices->err);
    const char *copy = e == NULL ? NULL : lstub__arena_string(notices->arena, message, notices->err);
    if (copy == NULL) {
        notices->status = LSTUB_E_MEMORY;
        if (e != NULL)
            notices->list.count--;
        return;
    }
    e->kind = kind;
    e->key = key;
    LSTUB_INIT(e->notice);
    e->notice.severity = severity;
    e->notice.line = line;
    e->notice.count = 1;
    e->notice.message = copy;
}

int32_t lstub__notices_give(const lstub__notices *notices, const lstub_allocator *allocator, lstub_notice **out, size_t *count,
                            lstub_error *err)
{
    lstub_notice *all = lstub__new(allocator, notices->list.count, sizeof *all, err);
    if (all == NULL)
        return LSTUB_E_MEMORY;
    for (size_t i = 0; i < notices->list.count; i++)
        all[i] = LSTUB__ITEM(notices->list, entry, i)->notice;
    *out = all;
    *count = notices->list.count;
    return LSTUB_OK;
}
