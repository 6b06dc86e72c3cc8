/* Notices of a board while it is read: alike ones are counted, the first one's words are kept. */
#ifndef LSTUB_IPC2581_NOTICE_H
#define LSTUB_IPC2581_NOTICE_H

#include "base/base.h"
#include "ipc2581/arena.h"
#include "libstub_ipc2581.h"

/* What alike means: the same kind and, where it matters, the same layer. */
enum {
    NOTE_REVISION, NOTE_UNITS, NOTE_STEP, NOTE_PANEL, NOTE_TWICE, NOTE_DANGLING, NOTE_STACKUP, NOTE_SEQUENCE, NOTE_GROUP,
    NOTE_DUMMY, NOTE_NOT_BUILT, NOTE_THICKNESS, NOTE_DK, NOTE_LOSS, NOTE_IN_PLANE, NOTE_RESIN, NOTE_CONDUCTIVITY, NOTE_FREQUENCY,
    NOTE_FUNCTION, NOTE_SPAN, NOTE_HOLE, NOTE_SLOT, NOTE_IMPLIED, NOTE_SAME_HOLE, NOTE_OUTSIDE, NOTE_SHAPE, NOTE_WIDTH,
    NOTE_PAD_SHAPE, NOTE_PAD_NET, NOTE_NEGATIVE, NOTE_SHORT, NOTE_ANTIPAD, NOTE_NO_PLANE, NOTE_MIXED, NOTE_SIDE, NOTE_PIN,
    NOTE_BACKDRILL, NOTE_BIT, NOTE_CHECK, NOTE_UNCONNECTED, NOTE_RETURN
};

typedef struct lstub__notices {
    struct board_arena *arena;
    lstub__list list;          /* of notices with their keys */
    int32_t status;            /* < 0: out of memory on the way */
    lstub_error *err;
} lstub__notices;

void lstub__notices_init(lstub__notices *notices, struct board_arena *arena, const lstub_allocator *allocator, lstub_error *err);
void lstub__notices_clear(lstub__notices *notices);
/* severity: LSTUB_NOTICE_...; key: a layer's number, or 0; line: -1 where there is none. */
void lstub__note(lstub__notices *notices, int32_t severity, int kind, int32_t key, int64_t line, const char *format, ...)
    LSTUB_PRINTF(6, 7);
/* All of them as an array of the board's, in the order in which they first came up. */
int32_t lstub__notices_give(const lstub__notices *notices, const lstub_allocator *allocator, lstub_notice **out, size_t *count,
                            lstub_error *err);

#endif
