/* Where a board file is to be changed so that it tells the back-drills: found in one pass, applied in another. */
#ifndef LSTUB_IPC2581_MARK_H
#define LSTUB_IPC2581_MARK_H

#include "ipc2581/arena.h"
#include "ipc2581/board.h"

/* A drilled hole: which rows of the drill table it belongs to, -1: none. */
typedef struct lstub__mark {
    int64_t ordinal;           /* of its Hole element */
    int32_t group[2];          /* bottom, top         */
} lstub__mark;

/* Bytes kept from the file. */
typedef struct lstub__piece {
    size_t at, bytes;          /* in lstub__marking.text */
} lstub__piece;

enum {
    EDIT_REFS,                 /* `raw`, then a SpecRef and `blank` for each group                          */
    EDIT_SPECS,                /* the Specs, each after `blank`                                             */
    EDIT_LAYERS,               /* the drill layers for holes that have no Hole element, each after `blank`  */
    EDIT_HOLES                 /* their features, each before `blank`                                       */
};

/* Something to put in before byte `at` of the file. */
typedef struct lstub__edit {
    int64_t      at;
    int          kind;         /* EDIT_... */
    int32_t      group[2];
    lstub__piece raw, blank, prefix;
} lstub__edit;

typedef struct lstub__marking {
    lstub__list edits;         /* of lstub__edit, in the order of the file */
    char   *text;
    int64_t taken;             /* highest number of a Spec or Layer of the file that is called like ours */
} lstub__marking;

/* The names of our Specs, and of our drill layers: one of these and a number. */
#define LSTUB__SPEC_BOTTOM "BACKDRILL_BOTTOM_"
#define LSTUB__SPEC_TOP    "BACKDRILL_TOP_"

/*
** Finds the places, marks sorted by ordinal; with `layers` those for drill layers too. LSTUB_E_FORMAT where the file is not the one the board was read from, or
** gives a Spec or a SpecRef no place. Release with lstub__marking_clear in any case.
*/
int32_t lstub__marking_make(lstub__marking *marking, const lstub_board *board, const lstub__mark *marks, size_t count,
                            int layers, lstub_error *err);
void    lstub__marking_clear(lstub__marking *marking, const lstub_board *board);

/* The error for a file that is not the one the board was read from. */
int32_t lstub__file_changed(const lstub_board *board, lstub_error *err);

#endif
