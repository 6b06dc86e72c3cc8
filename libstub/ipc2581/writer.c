/* The board file with the back-drills: the bytes of the source, and what lstub__marking_make found a place for. */
#include "ipc2581/mark.h"

#include "base/base.h"
#include "ipc2581/number.h"
#include "ipc2581/outfile.h"
#include "ipc2581/report.h"

#include <errno.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <zlib.h>

#define CHUNK 65536

/* ---- what is drilled ----------------------------------------------------------------------------- */

typedef struct drills {
    lstub__mark       *marks;
    size_t             count;
    lstub_drill_group *groups;
    double            *drill;        /* widest hole of each group, m: its bit must not come out narrower */
    int32_t            group_count;
} drills;

static int32_t mark_hole(const lstub_board *board, const lstub_plan *plan, size_t index, drills *d, lstub_error *err)
{
    const board_hole *hole = &board->holes[index];
    const lstub_drill_cut *cuts[2];
    lstub_decision decision;
    lstub__mark *mark = &d->marks[d->count];
    int32_t status;
    int i;
    LSTUB_INIT(decision);
    status = lstub_plan_decision(plan, index, &decision, err);
    if (status < 0)
        return status;
    cuts[0] = &decision.bottom;
    cuts[1] = &decision.top;
    if (!cuts[0]->drilled && !cuts[1]->drilled)
        return LSTUB_OK;
    if (hole->ordinal < 0)
        return lstub__fail(err, LSTUB_E_UNSUPPORTED, "plan", (int64_t)index,
                           "hole %lu, line %ld, is to be drilled, but stands in a pad stack: there is no <Hole> to mark",
                           (unsigned long)index, (long)hole->line);
    mark->ordinal = hole->ordinal;
    for (i = 0; i < 2; i++) {
        mark->group[i] = cuts[i]->drilled ? cuts[i]->group : -1;
        if (mark->group[i] >= d->group_count)
            return lstub__fail(err, LSTUB_E_ARGUMENT, "plan", (int64_t)index, "hole %lu is in drill row %ld of %ld", (unsigned long)index,
                               (long)mark->group[i] + 1, (long)d->group_count);
        if (mark->group[i] >= 0 && hole->via.drill > d->drill[mark->group[i]])
            d->drill[mark->group[i]] = hole->via.drill;
    }
    d->count++;
    return LSTUB_OK;
}

static int by_ordinal(const void *a, const void *b)
{
    int64_t x = ((const lstub__mark *)a)->ordinal, y = ((const lstub__mark *)b)->ordinal;
    return (x > y) - (x < y);
}

static void release_drills(drills *d, const lstub_board *board)
{
    lstub__free(&board->alloc, d->marks);
    lstub__free(&board->alloc, d->groups);
    lstub__free(&board->alloc, d->drill);
}

static int32_t collect_drills(const lstub_board *board, const lstub_plan *plan, drills *d, lstub_error *err)
{
    size_t i;
    int32_t group, status = LSTUB_OK;
    memset(d, 0, sizeof *d);
    d->group_count = lstub_plan_group_count(plan);
    d->marks = lstub__new(&board->alloc, board->hole_count, sizeof *d->marks, err);
    d->groups = lstub__new(&board->alloc, (size_t)d->group_count, sizeof *d->groups, err);
    d->drill = lstub__new(&board->alloc, (size_t)d->group_count, sizeof *d->drill, err);
    if (d->marks == NULL || d->groups == NULL || d->drill == NULL)
        return LSTUB_E_MEMORY;
    for (group = 0; group < d->group_count && status == LSTUB_OK; group++) {
        LSTUB_INIT(d->groups[group]);
        status = lstub_plan_group(plan, group, &d->groups[group], err);
    }
    for (i = 0; i < board->hole_count && status == LSTUB_OK; i++)
        status = mark_hole(board, plan, i, d, err);
    if (d->count > 1)
        qsort(d->marks, d->count, sizeof *d->marks, by_ordinal);
    return status;
}

/* ---- what is put in ------------------------------------------------------------------------------ */

typedef struct writing {
    const lstub_board *board;
    const drills      *drills;
    lstub__marking     marking;
    lstub__outfile    *out;          /* null: the source is only compared */
    lstub_error       *err;
} writing;

static void put_piece(const writing *w, lstub__piece piece)
{
    lstub__out_bytes(w->out, w->marking.text + piece.at, piece.bytes);
}

static void put_attribute(const writing *w, const char *text)
{
    for (; *text != '\0'; text++) {
        char code[8];
        if (strchr("&<>\"", *text) == NULL && (unsigned char)*text >= 0x20) {
            lstub__out_bytes(w->out, text, 1);
            continue;
        }
        snprintf(code, sizeof code, "&#%d;", *text);
        lstub__out_text(w->out, code);
    }
}

static void put_spec_name(const writing *w, int32_t group)
{
    char number[LSTUB__NUMBER_MAX];
    snprintf(number, sizeof number, "%ld", (long)(w->marking.taken + group + 1));
    lstub__out_text(w->out, w->drills->groups[group].side == LSTUB_SIDE_TOP ? LSTUB__SPEC_TOP : LSTUB__SPEC_BOTTOM);
    lstub__out_text(w->out, number);
}

static void put_tag(const writing *w, const lstub__edit *edit, const char *open, const char *name)
{
    lstub__out_text(w->out, open);
    put_piece(w, edit->prefix);
    lstub__out_text(w->out, name);
}

/* <Backdrill what><Property name="value" more/></Backdrill> on lines of their own, if the file has lines. */
static void put_backdrill(const writing *w, const lstub__edit *edit, const char *what, const char *name, const char *value,
                          const char *unit)
{
    const char *deeper = edit->blank.bytes > 0 ? "  " : "";
    put_piece(w, edit->blank);
    lstub__out_text(w->out, deeper);
    put_tag(w, edit, "<", "Backdrill ");
    lstub__out_text(w->out, what);
    lstub__out_text(w->out, ">");
    put_tag(w, edit, "<", "Property ");
    lstub__out_text(w->out, name);
    lstub__out_text(w->out, "=\"");
    put_attribute(w, value);
    if (unit != NULL) {
        lstub__out_text(w->out, "\" unit=\"");
        lstub__out_text(w->out, unit);
    }
    lstub__out_text(w->out, "\"/>");
    put_tag(w, edit, "</", "Backdrill>");
}

/* In the unit of the file's header, by the word that a Property has for it. */
static void put_length(const writing *w, const lstub__edit *edit, const char *what, double length, double least)
{
    static const struct { double unit; const char *word; } units[] = {{0.0254, "INCH"}, {1e-6, "MICRON"}, {1e-3, "MM"}};
    char text[LSTUB__NUMBER_MAX];
    int i = 0;
    while (i < 2 && units[i].unit != w->board->unit)
        i++;
    put_backdrill(w, edit, what, "value", lstub__length_text(text, length, least, units[i].unit), units[i].word);
}

static void put_specs(const writing *w, const lstub__edit *edit)
{
    int32_t i;
    for (i = 0; i < w->drills->group_count; i++) {
        const lstub_drill_group *group = &w->drills->groups[i];
        put_piece(w, edit->blank);
        put_tag(w, edit, "<", "Spec name=\"");
        put_spec_name(w, i);
        lstub__out_text(w->out, "\">");
        put_backdrill(w, edit, "type=\"START_LAYER\"", "layerOrGroupRef", lstub__report_layer(w->board, group->from_layer), NULL);
        put_backdrill(w, edit, "type=\"MUST_NOT_CUT_LAYER\"", "layerOrGroupRef",
                      lstub__report_layer(w->board, group->must_not_cut), NULL);
        put_length(w, edit, "type=\"MAX_STUB_LENGTH\"", group->residual_most, 0.0);
        put_length(w, edit, "type=\"OTHER\" comment=\"TARGET_DEPTH\"", group->depth, 0.0);
        put_length(w, edit, "type=\"OTHER\" comment=\"BIT_DIAMETER\"", group->diameter, w->drills->drill[i]);
        put_piece(w, edit->blank);
        put_tag(w, edit, "</", "Spec>");
    }
}

static void put_edit(const writing *w, const lstub__edit *edit)
{
    int i;
    if (edit->specs) {
        put_specs(w, edit);
        return;
    }
    put_piece(w, edit->raw);
    for (i = 0; i < 2; i++)
        if (edit->group[i] >= 0) {
            put_tag(w, edit, "<", "SpecRef id=\"");
            put_spec_name(w, edit->group[i]);
            lstub__out_text(w->out, "\"/>");
            put_piece(w, edit->blank);
        }
}

/* ---- the source ---------------------------------------------------------------------------------- */

static int32_t cannot_read(const lstub_board *board, gzFile file, lstub_error *err)
{
    int code = Z_ERRNO;
    const char *what = file != NULL ? gzerror(file, &code) : "";
    return lstub__fail(err, LSTUB_E_READ, "board", -1, "cannot read '%s': %s", lstub__path_tail(board->path),
                       code == Z_ERRNO ? strerror(errno) : what);
}

/* The chunk that begins at byte `at` of the source, with the edits that fall into it; *next is the next edit. */
static void put_chunk(const writing *w, const char *chunk, size_t bytes, int64_t at, size_t *next)
{
    const lstub__list *edits = &w->marking.edits;
    size_t done = 0;
    while (*next < edits->count && LSTUB__ITEM(*edits, lstub__edit, *next)->at < at + (int64_t)bytes) {
        const lstub__edit *edit = LSTUB__ITEM(*edits, lstub__edit, *next);
        size_t upto = (size_t)(edit->at - at);
        lstub__out_bytes(w->out, chunk + done, upto - done);
        put_edit(w, edit);
        done = upto;
        ++*next;
    }
    lstub__out_bytes(w->out, chunk + done, bytes - done);
}

/* Reads the source once more, into the output if there is one. */
static int32_t stream(const writing *w)
{
    gzFile file;
    char *chunk = lstub__new(&w->board->alloc, CHUNK, 1, w->err);
    uint32_t crc = (uint32_t)crc32(0, NULL, 0);
    int64_t at = 0;
    size_t next = 0;
    int got;
    int32_t status;
    if (chunk == NULL)
        return LSTUB_E_MEMORY;
    file = gzopen(w->board->path, "rb");
    if (file == NULL) {
        lstub__free(&w->board->alloc, chunk);
        return cannot_read(w->board, NULL, w->err);
    }
    while ((got = gzread(file, chunk, CHUNK)) > 0) {
        crc = (uint32_t)crc32(crc, (const unsigned char *)chunk, (uInt)got);
        if (w->out != NULL)
            put_chunk(w, chunk, (size_t)got, at, &next);
        at += got;
    }
    status = got < 0 ? cannot_read(w->board, file, w->err) : LSTUB_OK;
    gzclose(file);
    lstub__free(&w->board->alloc, chunk);
    if (status == LSTUB_OK && (crc != w->board->source_crc || at != w->board->source_bytes))
        status = lstub__file_changed(w->board, w->err);
    return status;
}

/* ---- encoding: what is put in is UTF-8 ----------------------------------------------------------- */

static int32_t refuse_encoding(const lstub_board *board, const char *name, size_t bytes, lstub_error *err)
{
    return lstub__fail(err, LSTUB_E_UNSUPPORTED, "board", 1, "'%s' is encoded in %.*s: only UTF-8 can be written",
                       lstub__path_tail(board->path), bytes < 40 ? (int)bytes : 40, name);
}

static int is_utf8(const char *name, size_t bytes)
{
    static const char want[] = "utf-8";
    size_t i;
    for (i = 0; i < bytes && i < 5; i++)
        if ((name[i] >= 'A' && name[i] <= 'Z' ? name[i] - 'A' + 'a' : name[i]) != want[i])
            return 0;
    return bytes == 5;
}

/* By the XML declaration and the first bytes. The board has been read: the declaration is well-formed if it is there. */
static int32_t check_encoding(const lstub_board *board, lstub_error *err)
{
    char head[1025];
    const char *start, *end, *name;
    size_t bytes;
    int got;
    gzFile file = gzopen(board->path, "rb");
    if (file == NULL)
        return cannot_read(board, NULL, err);
    got = gzread(file, head, sizeof head - 1);
    gzclose(file);
    head[got > 0 ? got : 0] = '\0';
    if (got >= 2 && (memcmp(head, "\xFF\xFE", 2) == 0 || memcmp(head, "\xFE\xFF", 2) == 0 || head[0] == '\0' || head[1] == '\0'))
        return refuse_encoding(board, "UTF-16", 6, err);
    start = strncmp(head, "\xEF\xBB\xBF", 3) == 0 ? head + 3 : head;
    end = strstr(start, "?>");
    name = strstr(start, "encoding");
    if (strncmp(start, "<?xml", 5) != 0 || strchr(" \t\r\n", start[5]) == NULL || end == NULL || name == NULL || name > end)
        return LSTUB_OK;
    name += strcspn(name, "\"'");
    name += *name != '\0';
    bytes = strcspn(name, "\"'");
    return is_utf8(name, bytes) ? LSTUB_OK : refuse_encoding(board, name, bytes, err);
}

/* ---- all of it ----------------------------------------------------------------------------------- */

static int32_t mark_file(writing *w)
{
    int32_t status = check_encoding(w->board, w->err);
    return status < 0 ? status : lstub__marking_make(&w->marking, w->board, w->drills->marks, w->drills->count, w->err);
}

int32_t lstub_board_write(const lstub_board *board, const lstub_plan *plan, const char *path, lstub_error *err)
{
    drills d;
    writing w;
    lstub__report report;
    int32_t status = lstub__report_open(&report, board, plan, err);
    if (status < 0)
        return status;
    memset(&w, 0, sizeof w);
    w.board = board;
    w.drills = &d;
    w.err = err;
    status = collect_drills(board, plan, &d, err);
    if (status == LSTUB_OK)
        status = stream(&w);         /* the file of the board, before anything is said about it */
    if (status == LSTUB_OK && d.group_count > 0)
        status = mark_file(&w);
    if (status == LSTUB_OK)
        status = lstub__out_open(path, &board->alloc, &w.out, err);
    if (status == LSTUB_OK) {
        status = stream(&w);         /* from the file again: it may be larger than memory */
        status = lstub__out_close(w.out, status, err);
    }
    lstub__marking_clear(&w.marking, board);
    release_drills(&d, board);
    return status;
}
