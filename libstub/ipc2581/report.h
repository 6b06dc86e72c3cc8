/* A plan seen hole by hole, with names: what the tables and the summary are made from. */
#ifndef LSTUB_IPC2581_REPORT_H
#define LSTUB_IPC2581_REPORT_H

#include "ipc2581/board.h"

typedef struct lstub__row {
    const board_hole *hole;
    lstub_decision    decision;
    const char       *signal;        /* "" where there is none, or its name is not known               */
    double            symbol_rate;   /* Bd; NaN: none                                                  */
    int32_t           levels;        /* 0: not known                                                   */
} lstub__row;

/* Whether the plan can be one of this board: LSTUB_E_ARGUMENT if not. */
int32_t lstub__report_check(const lstub_board *board, const lstub_plan *plan, lstub_error *err);
int32_t lstub__report_row(const lstub_board *board, const lstub_plan *plan, size_t index, lstub__row *row, lstub_error *err);
/* Whether the numbers before and after the plan are there. */
int         lstub__report_judged(const lstub__row *row);
/* Name of a stackup layer, "" where there is no such layer. */
const char *lstub__report_layer(const lstub_board *board, int32_t layer);

#endif
