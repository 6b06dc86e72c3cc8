/* The board file with the back-drills: the bytes of the source, and what lstub__marking_make found a place for. */
#include "ipc2581/mark.h"

#include "base/base.h"
#include "ipc2581/number.h"
#include "ipc2581/outfile.h"
#include "ipc2581/report.h"

#include <errno.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <zlib.h>

#define CHUNK 65536

/* ---- what is drilled ----------------------------------------------------------------------------- */

typedef struct drills {
    lstub__mark       *marks;        /* of holes with a Hole element: `count`, from the front                 */
    size_t             count;
    lstub__mark       *loose;        /* of the others: `loose_count`, ordinal: number of the hole             */
    size_t             loose_count;
    lstub_drill_group *groups;
    double            *drill;        /* widest hole of each group, m: its bit must not come out narrower */
    int32_t            group_count;
} drills;

static int32_t mark_hole(const lstub_board *board, const lstub_plan *plan, size_t index, drills *d, lstub_error *err)
{
    const board_hole *hole = &board->holes[index];
    const lstub_drill_cut *cuts[2];
    lstub_decision decision;
    lstub__mark *mark;
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
    mark = hole->ordinal < 0 ? &d->loose[d->loose_count++] : &d->marks[d->count++];
    mark->ordinal = hole->ordinal < 0 ? (int64_t)index : hole->ordinal;
    for (i = 0; i < 2; i++) {
        mark->group[i] = cuts[i]->drilled ? cuts[i]->group : -1;
        if (mark->group[i] >= d->group_count)
            return lstub__fail(err, LSTUB_E_ARGUMENT, "plan", (int64_t)index, "hole %lu is in drill row %ld of %ld", (unsigned long)index,
                               (long)mark->group[i] + 1, (long)d->group_count);
        if (mark->group[i] >= 0 && hole->via.drill > d->drill[mark->group[i]])
            d->drill[mark->group[i]] = hole->via.drill;
    }
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
    lstub__free(&board->alloc, d->loose);
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
    d->loose = lstub__new(&board->alloc, board->hole_count, sizeof *d->loose, err);
    d->groups = lstub__new(&board->alloc, (size_t)d->group_count, sizeof *d->groups, err);
    d->drill = lstub__new(&board->alloc, (size_t)d->group_count, sizeof *d->drill, err);
    if (d->marks == NULL || d->loose == NULL || d->groups == NULL || d->drill == NULL)
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

static void put_ref(const writing *w, const lstub__edit *edit, int32_t group)
{
    put_tag(w, edit, "<", "SpecRef id=\"");
    put_spec_name(w, group);
    lstub__out_text(w->out, "\"/>");
}

typedef struct file_unit {
    double      length;              /* m */
    const char *word;                /* in a Property */
} file_unit;

/* That of the file's header. */
static const file_unit *unit_of(const lstub_board *board)
{
    static const file_unit units[] = {{0.0254, "INCH"}, {1e-6, "MICRON"}, {1e-3, "MM"}};
    int i = 0;
    while (i < 2 && units[i].length != board->unit)
        i++;
    return &units[i];
}

static void put_length(const writing *w, const lstub__edit *edit, const char *what, double length, double least)
{
    const file_unit *unit = unit_of(w->board);
    char text[LSTUB__NUMBER_MAX];
    put_backdrill(w, edit, what, "value", lstub__length_text(text, length, least, unit->length), unit->word);
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

/* The copper layer next to the must-not-cut layer: the last one that the drill may go through. */
static const char *last_layer_cut(const lstub_board *board, const lstub_drill_group *group)
{
    int32_t i, layer = 0, count = lstub_stackup_copper_count(board->stackup), last = group->from_layer;
    for (i = 0; i < count; i++) {
        int32_t number = group->side == LSTUB_SIDE_TOP ? i : count - 1 - i;   /* from the drill's side inwards */
        if (lstub_stackup_copper(board->stackup, number, &layer, NULL) < 0 || layer == group->must_not_cut)
            break;
        last = layer;
    }
    return lstub__report_layer(board, last);
}

static int has_loose(const drills *d, int32_t group)
{
    size_t i;
    for (i = 0; i < d->loose_count; i++)
        if (d->loose[i].group[0] == group || d->loose[i].group[1] == group)
            return 1;
    return 0;
}

/* Holes that come from pad stacks have no element to mark. Their back-drills get a drill layer of their own, as many
   programs write it: bare holes, where the barrels are, with the same Specs. */
static void put_layers(const writing *w, const lstub__edit *edit)
{
    int32_t i;
    for (i = 0; i < w->drills->group_count; i++) {
        const lstub_drill_group *group = &w->drills->groups[i];
        if (!has_loose(w->drills, i))
            continue;
        put_piece(w, edit->blank);
        put_tag(w, edit, "<", "Layer name=\"");
        put_spec_name(w, i);
        lstub__out_text(w->out, "\" layerFunction=\"DRILL\" side=\"");
        lstub__out_text(w->out, group->side == LSTUB_SIDE_TOP ? "TOP" : "BOTTOM");
        lstub__out_text(w->out, "\" polarity=\"POSITIVE\">");
        put_tag(w, edit, "<", "Span fromLayer=\"");
        put_attribute(w, lstub__report_layer(w->board, group->from_layer));
        lstub__out_text(w->out, "\" toLayer=\"");
        put_attribute(w, last_layer_cut(w->board, group));
        lstub__out_text(w->out, "\"/>");
        put_tag(w, edit, "</", "Layer>");
    }
}

static void put_loose_hole(const writing *w, const lstub__edit *edit, size_t number, int32_t group)
{
    const board_hole *hole = &w->board->holes[w->drills->loose[number].ordinal];
    const file_unit *unit = unit_of(w->board);
    char text[LSTUB__NUMBER_MAX];
    put_tag(w, edit, "<", "Set net=\"");
    put_attribute(w, hole->net);
    lstub__out_text(w->out, "\">");
    put_ref(w, edit, group);
    put_tag(w, edit, "<", "Hole name=\"BD");
    snprintf(text, sizeof text, "%lu", (unsigned long)number + 1);
    lstub__out_text(w->out, text);
    lstub__out_text(w->out, "\" diameter=\"");
    lstub__out_text(w->out, lstub__length_text(text, w->drills->groups[group].diameter, w->drills->drill[group], unit->length));
    lstub__out_text(w->out, "\" platingStatus=\"NONPLATED\" plusTol=\"0\" minusTol=\"0\" x=\"");
    lstub__out_text(w->out, lstub__length_text(text, hole->x, -HUGE_VAL, unit->length));
    lstub__out_text(w->out, "\" y=\"");
    lstub__out_text(w->out, lstub__length_text(text, hole->y, -HUGE_VAL, unit->length));
    lstub__out_text(w->out, "\"/>");
    put_tag(w, edit, "</", "Set>");
}

static void put_loose_holes(const writing *w, const lstub__edit *edit)
{
    size_t k;
    int32_t i;
    for (i = 0; i < w->drills->group_count; i++) {
        if (!has_loose(w->drills, i))
            continue;
        put_tag(w, edit, "<", "LayerFeature layerRef=\"");
        put_spec_name(w, i);
        lstub__out_text(w->out, "\">");
        for (k = 0; k < w->drills->loose_count; k++)
            if (w->drills->loose[k].group[0] == i || w->drills->loose[k].group[1] == i) {
                put_piece(w, edit->blank);
                put_loose_hole(w, edit, k, i);
            }
        put_tag(w, edit, "</", "LayerFeature>");
        put_piece(w, edit->blank);
    }
}

static void put_edit(const writing *w, const lstub__edit *edit)
{
    int i;
    switch (edit->kind) {
    case EDIT_SPECS: put_specs(w, edit); return;
    case EDIT_LAYERS: put_layers(w, edit); return;
    case EDIT_HOLES: put_loose_holes(w, edit); return;
    default: break;
    }
    put_piece(w, edit->raw);
    for (i = 0; i < 2; i++)
        if (edit->group[i] >= 0) {
            put_ref(w, edit, edit->group[i]);
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
    return status < 0 ? status : lstub__marking_make(&w->marking, w->board, w->drills->marks, w->drills->count,
                                                       w->drills->loose_count > 0, w->err);
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
