/*
** libstub, optional part: boards in IPC-2581 (revisions B and C), rules, plans written out.
**
** A board file becomes a stackup and one via per plated hole, with the layers where each connects; a small
** rules file says which nets carry which signal; a plan comes back as tables and as the same board file with
** standard Backdrill specifications. Link with -lstub_ipc2581 -lstub; needs expat and zlib.
**
** Everything said at the top of libstub.h (units, structs, handles, status, errors, threads) holds here too.
** Coordinates of a board are in metres. Strings are UTF-8 and live as long as the handle they come from.
** Nothing is guessed silently: whatever was missing, contradictory or refused is a notice with its line.
*/
#ifndef LIBSTUB_IPC2581_H
#define LIBSTUB_IPC2581_H

#include "libstub.h"

#ifdef __cplusplus
extern "C" {
#endif

/* ---- rules: which net carries what, and what the fabricator can do ------------------------------- */

typedef struct lstub_rules lstub_rules;

/*
** Text, one rule a line, `#` starts a comment, words apart by blanks; docs/guide.md describes each rule.
** Lengths need a unit (m mm um mil in), symbol rates Bd MBd GBd; patterns know * and ?, case counts, the first
** match wins.
**
**     signal  NAME symbol_rate 53.125 GBd levels 4 notch_over_nyquist 2 added_loss 0.3 dB
**     net     PATTERN NAME|none
**     pair    SUFFIX_P SUFFIX_N [separate|shared]        nets alike but for these endings are a pair
**     returns PATTERN within 1.5 mm                      plated holes of these nets carry the return
**     pin     PATTERN length 1.0 mm                      pad stacks of press-fit pins, least barrel to keep
**     default dk|loss_tangent|in_plane_ratio VALUE       used only where the file has none, with a notice
**     default antipad LENGTH                             for planes where none can be derived, with a notice
**     fab     depth_tolerance|cut_clearance|residual_min|residual_target|bit_oversize|wall_clearance LENGTH
**     fab     aspect_ratio VALUE | sides top|bottom|both | tolerance worst|rss | depths LENGTH LENGTH ...
**
** in_plane_ratio is nowhere in a board file: without the rule it is 1 and a notice says so.
** Unknown words, missing units and values out of range: LSTUB_E_FORMAT with the line.
*/
LSTUB_API int32_t lstub_rules_load(const char *path, const lstub_allocator *allocator, lstub_rules **out, lstub_error *err);
LSTUB_API int32_t lstub_rules_parse(const char *text, size_t bytes, const lstub_allocator *allocator, lstub_rules **out,
                                    lstub_error *err);
LSTUB_API void    lstub_rules_destroy(lstub_rules *rules);                       /* null is allowed     */
LSTUB_API int32_t lstub_rules_signal_count(const lstub_rules *rules);
LSTUB_API int32_t lstub_rules_signal(const lstub_rules *rules, int32_t index, const char **name, lstub_signal *signal,
                                     lstub_criteria *criteria, lstub_error *err);    /* each may be null    */
/* Number of the signal that a net carries, -1 for none. */
LSTUB_API int32_t lstub_rules_match(const lstub_rules *rules, const char *net, int32_t *signal, lstub_error *err);
/* What `fab` rules say; members without a rule are 0. */
LSTUB_API int32_t lstub_rules_capability(const lstub_rules *rules, lstub_capability *out, lstub_error *err);

/* ---- board --------------------------------------------------------------------------------------- */

typedef struct lstub_board lstub_board;

typedef struct lstub_board_options {
    size_t      size;
    const char *stackup;           /* name of the stackup to use where a file has several; null: the first */
    int32_t   (*progress)(void *user, double fraction);  /* called now and then, 0 to 1; not 0: give up;
                                                            null: none                                  */
    void       *progress_user;
} lstub_board_options;

/*
** Reads a board (plain or gzip) twice, streaming: memory follows the number of holes, not the size of the
** file. rules may be null (no signals, no returns, no defaults). Entity declarations are refused, as are
** nesting beyond 64 levels and names or values beyond 64 KiB.
*/
LSTUB_API int32_t lstub_board_load(const char *path, const lstub_rules *rules, const lstub_board_options *options,
                                   const lstub_allocator *allocator, lstub_board **out, lstub_error *err);
LSTUB_API void    lstub_board_destroy(lstub_board *board);                       /* null is allowed     */

LSTUB_API const char          *lstub_board_name(const lstub_board *board);       /* of the step read    */
LSTUB_API const lstub_stackup *lstub_board_stackup(const lstub_board *board);    /* lives with the board */

#define LSTUB_HOLE_VIA 1           /* platingStatus VIA                                                */
#define LSTUB_HOLE_PIN 2           /* platingStatus PLATED: a component's pin                          */

typedef struct lstub_hole {        /* a plated hole, in the order of the file                          */
    size_t      size;
    const char *name, *net, *padstack;  /* "" where the file has none                                  */
    int32_t     kind;              /* LSTUB_HOLE_...                                                   */
    int32_t     signal;            /* number of the rules' signal, -1: none                            */
    int32_t     partner;           /* hole of the other net of the pair, -1: none                      */
    int32_t     status;            /* LSTUB_OK, or why it is no via: lstub_via_check's status          */
    double      x, y;              /* m                                                                */
    int64_t     line;              /* of the file                                                      */
} lstub_hole;

LSTUB_API size_t  lstub_board_hole_count(const lstub_board *board);
LSTUB_API int32_t lstub_board_hole(const lstub_board *board, size_t index, lstub_hole *out, lstub_error *err);
/* The hole as a via on the board's stackup; its pointers live with the board. */
LSTUB_API int32_t lstub_board_via(const lstub_board *board, size_t index, lstub_via *out, lstub_error *err);

#define LSTUB_NOTICE_NOTE    0     /* something used in a way worth knowing                            */
#define LSTUB_NOTICE_WARNING 1     /* something missing or contradictory, settled by a stated rule     */
#define LSTUB_NOTICE_REFUSED 2     /* something not used                                               */

typedef struct lstub_notice {      /* alike ones are counted, not repeated                             */
    size_t      size;
    int32_t     severity;          /* LSTUB_NOTICE_...                                                 */
    int32_t     reserved;
    int64_t     line;              /* of the file, of the first one                                    */
    int64_t     count;             /* how many like it                                                 */
    const char *message;           /* what, where, and the rule it was settled by                      */
} lstub_notice;

LSTUB_API size_t  lstub_board_notice_count(const lstub_board *board);
LSTUB_API int32_t lstub_board_notice(const lstub_board *board, size_t index, lstub_notice *out, lstub_error *err);

/* ---- plan ---------------------------------------------------------------------------------------- */

/*
** Plans the board: job number i is hole number i, with the signal and criteria that `rules` give its net.
** capability null: what the rules say. The result is a plan as in libstub.h.
*/
LSTUB_API int32_t lstub_board_plan(const lstub_board *board, const lstub_rules *rules, const lstub_capability *capability,
                                   const lstub_model_options *options, const lstub_allocator *allocator,
                                   lstub_plan **out, lstub_error *err);

/*
** Files. Each is written beside its place and moved there when it is whole: a failure leaves what was there.
** plan.csv has a row per plated hole, drill_table.csv a row per drill group; docs/guide.md describes the columns.
** A board path that ends in .gz is compressed. The board file is the one read, byte for byte, but for a Spec per
** drill group and a SpecRef at each hole drilled; the file must not have changed since.
*/
LSTUB_API int32_t lstub_board_write_plan_csv(const lstub_board *board, const lstub_plan *plan, const char *path, lstub_error *err);
LSTUB_API int32_t lstub_board_write_drill_csv(const lstub_board *board, const lstub_plan *plan, const char *path, lstub_error *err);
LSTUB_API int32_t lstub_board_write(const lstub_board *board, const lstub_plan *plan, const char *path, lstub_error *err);
/* The summary a person reads, plain text, lines of at most 100 characters. *needed: bytes with the final zero;
** text may be null to ask. Less room than needed: LSTUB_W_CAPACITY and a text cut short. */
LSTUB_API int32_t lstub_board_summary(const lstub_board *board, const lstub_plan *plan, char *text, size_t bytes,
                                      size_t *needed, lstub_error *err);

#ifdef __cplusplus
}
#endif
#endif
