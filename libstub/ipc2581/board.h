/* What a board is inside: filled by the reader, asked by plan, report and writer. */
#ifndef LSTUB_IPC2581_BOARD_H
#define LSTUB_IPC2581_BOARD_H

#include "libstub_ipc2581.h"

typedef struct board_hole {
    const char *name, *net, *padstack;   /* interned in the board, never null                          */
    double      x, y;                    /* m                                                          */
    int64_t     line;                    /* of its Hole element                                        */
    int64_t     ordinal;                 /* number of its Hole element among all Hole elements of the file,
                                            plated or not, from 0: the writer finds it by this. -1: the file
                                            has no such element (the hole comes from a pad stack)      */
    int32_t     kind, signal, partner, status;
    lstub_via   via;                     /* arrays point into the board's arena                        */
} board_hole;

struct lstub_board {
    lstub_allocator alloc;
    char           *path;                /* as given to lstub_board_load                               */
    uint32_t        source_crc;          /* CRC-32 of the unpacked file: the writer compares it        */
    int64_t         source_bytes;        /* unpacked                                                   */
    const char     *step;
    lstub_stackup  *stackup;
    lstub_rules    *rules;               /* a copy of those it was read with; null: none               */
    board_hole     *holes;
    size_t          hole_count;
    lstub_notice   *notices;
    size_t          notice_count;
    double          unit;                /* metres per unit of the CadHeader                           */
    struct board_arena *arena;           /* owns the strings and the arrays of the vias                */
};

#endif
