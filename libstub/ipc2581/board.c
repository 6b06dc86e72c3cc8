#include "ipc2581/reader.h"

#include <string.h>

/* ---- loading ----------------------------------------------------------------------------------- */

static int32_t begin(reader *r)
{
    const lstub_allocator *a = r->alloc;
    struct board_arena *keep = r->board->arena = lstub__arena_create(a, r->err);
    r->work = keep == NULL ? NULL : lstub__arena_create(a, r->err);
    if (r->work == NULL)
        return LSTUB_E_MEMORY;
    lstub__notices_init(&r->notices, keep, a, r->err);
    lstub__names_init(&r->nets, keep, a);
    lstub__names_init(&r->padstacks_named, keep, a);
    lstub__names_init(&r->steps, keep, a);
    lstub__names *names[] = {&r->lines, &r->fills, &r->shapes[0], &r->shapes[1], &r->specs_named, &r->layers_named, &r->components, &r->implied};
    for (size_t i = 0; i < sizeof names / sizeof names[0]; i++)
        lstub__names_init(names[i], r->work, a);
    lstub__list_init(&r->line_widths, a, sizeof(reader_width));
    lstub__list_init(&r->fill_kinds, a, sizeof(int));
    lstub__list_init(&r->shape_list[0], a, sizeof(lstub__shape));
    lstub__list_init(&r->shape_list[1], a, sizeof(lstub__shape));
    lstub__list_init(&r->specs, a, sizeof(reader_spec));
    lstub__list_init(&r->layers, a, sizeof(reader_layer));
    lstub__list_init(&r->padstacks, a, sizeof(reader_padstack));
    lstub__list_init(&r->component_sides, a, sizeof(int32_t));
    lstub__list_init(&r->stackups, a, sizeof(reader_stackup));
    lstub__list_init(&r->stack_layers, a, sizeof(reader_stack_layer));
    lstub__list_init(&r->padstack_pads, a, sizeof(reader_padstack_pad));
    lstub__list_init(&r->sites, a, sizeof(reader_site));
    lstub__list_init(&r->bits, a, sizeof(reader_bit));
    lstub__list_init(&r->stack, a, sizeof(lstub_layer));
    lstub__list_init(&r->stack_from, a, sizeof(int32_t));
    r->entry = r->layer_entry = r->step = r->layer = r->pad_stack = -1;
    return lstub__names_add(&r->nets, "", r->err) < 0 ? LSTUB_E_MEMORY : LSTUB_OK;   /* net 0: none */
}

static void end(reader *r)
{
    lstub__names *names[] = {&r->lines, &r->fills, &r->shapes[0], &r->shapes[1], &r->specs_named, &r->layers_named, &r->nets,
                             &r->padstacks_named, &r->components, &r->steps, &r->implied};
    lstub__list *lists[] = {&r->line_widths, &r->fill_kinds, &r->shape_list[0], &r->shape_list[1], &r->specs, &r->layers, &r->padstacks,
                            &r->component_sides, &r->stackups, &r->stack_layers, &r->padstack_pads, &r->sites, &r->bits, &r->stack, &r->stack_from};
    for (size_t i = 0; i < sizeof names / sizeof names[0]; i++)
        lstub__names_clear(names[i]);
    for (size_t i = 0; i < sizeof lists / sizeof lists[0]; i++)
        lstub__list_clear(lists[i]);
    lstub__notices_clear(&r->notices);
    lstub__grid_destroy(&r->grid);
    lstub__free(r->alloc, r->x);
    lstub__free(r->alloc, r->y);
    lstub__free(r->alloc, r->cells);
    lstub__free(r->alloc, r->net);
    lstub__arena_destroy(r->work);
}

static int32_t run(reader *r)
{
    lstub_board *b = r->board;
    int32_t status;
    if ((status = begin(r)) < 0
        || (status = lstub__reader_scan(r, b->path)) < 0
        || (status = lstub__reader_lay_out(r)) < 0
        || (status = lstub__reader_settle(r)) < 0
        || (status = lstub__reader_features(r, b->path)) < 0)
        return status;
    lstub__reader_barrels(r);
    lstub__reader_bits(r);
    lstub__reader_kinds(r);
    if ((status = lstub__reader_make_stackup(r)) < 0
        || (status = lstub__reader_vias(r)) < 0)
        return status;
    lstub__reader_returns(r);
    lstub__reader_check(r);
    if (r->notices.status < 0)
        return r->notices.status;
    return lstub__notices_give(&r->notices, r->alloc, &b->notices, &b->notice_count, r->err);
}

static int32_t keep_path(lstub_board *board, const char *path, lstub_error *err)
{
    size_t bytes = strlen(path) + 1;
    board->path = lstub__new(&board->alloc, bytes, 1, err);
    if (board->path == NULL)
        return LSTUB_E_MEMORY;
    memcpy(board->path, path, bytes);
    return LSTUB_OK;
}

int32_t lstub_board_load(const char *path, const lstub_rules *rules, const lstub_board_options *options,
                         const lstub_allocator *allocator, lstub_board **out, lstub_error *err)
{
    lstub_board_options ours;
    lstub_allocator alloc;
    reader r;
    int32_t status;
    LSTUB_INIT(ours);
    if (path == NULL || out == NULL)
        return lstub__fail(err, LSTUB_E_NULL, path == NULL ? "path" : "out", -1, "%s = null: must not be null", path == NULL ? "path" : "out");
    if ((options != NULL && (status = lstub__take(&ours, sizeof ours, options, sizeof ours, "options", err)) < 0)
        || (status = lstub__allocator(allocator, &alloc, err)) < 0)
        return status;
    lstub_board *board = lstub__new(&alloc, 1, sizeof *board, err);
    if (board == NULL)
        return LSTUB_E_MEMORY;
    board->alloc = alloc;
    memset(&r, 0, sizeof r);
    r.board = board;
    r.alloc = &board->alloc;
    r.rules = rules;
    r.options = &ours;
    r.err = err;
    status = keep_path(board, path, err);
    if (status == LSTUB_OK && rules != NULL)
        status = lstub__rules_copy(rules, &alloc, &board->rules, err);
    if (status == LSTUB_OK)
        status = run(&r);
    end(&r);
    if (status < 0) {
        lstub_board_destroy(board);
        return status;
    }
    *out = board;
    return LSTUB_OK;
}

void lstub_board_destroy(lstub_board *board)
{
    if (board == NULL)
        return;
    lstub_allocator alloc = board->alloc;
    lstub_stackup_destroy(board->stackup);
    lstub_rules_destroy(board->rules);
    lstub__arena_destroy(board->arena);
    lstub__free(&alloc, board->holes);
    lstub__free(&alloc, board->notices);
    lstub__free(&alloc, board->path);
    lstub__free(&alloc, board);
}

/* ---- asking ------------------------------------------------------------------------------------ */

const char *lstub_board_name(const lstub_board *board) { return board != NULL ? board->step : ""; }
const lstub_stackup *lstub_board_stackup(const lstub_board *board) { return board != NULL ? board->stackup : NULL; }
size_t lstub_board_hole_count(const lstub_board *board) { return board != NULL ? board->hole_count : 0; }
size_t lstub_board_notice_count(const lstub_board *board) { return board != NULL ? board->notice_count : 0; }

static int32_t check_index(const lstub_board *board, size_t index, size_t count, lstub_error *err)
{
    if (board == NULL)
        return lstub__fail(err, LSTUB_E_NULL, "board", -1, "board = null: must not be null");
    if (index >= count)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "index", (int64_t)index, "index = %lu: must be < %lu", (unsigned long)index, (unsigned long)count);
    return LSTUB_OK;
}

int32_t lstub_board_hole(const lstub_board *board, size_t index, lstub_hole *out, lstub_error *err)
{
    lstub_hole hole;
    int32_t status = check_index(board, index, lstub_board_hole_count(board), err);
    if (status < 0)
        return status;
    const board_hole *h = &board->holes[index];
    LSTUB_INIT(hole);
    hole.name = h->name;
    hole.net = h->net;
    hole.padstack = h->padstack;
    hole.kind = h->kind;
    hole.signal = h->signal;
    hole.partner = h->partner;
    hole.status = h->status;
    hole.x = h->x;
    hole.y = h->y;
    hole.line = h->line;
    return lstub__give(&hole, sizeof hole, out, sizeof hole, "out", err);
}

int32_t lstub_board_via(const lstub_board *board, size_t index, lstub_via *out, lstub_error *err)
{
    int32_t status = check_index(board, index, lstub_board_hole_count(board), err);
    return status < 0 ? status : lstub__give(&board->holes[index].via, sizeof(lstub_via), out, sizeof(lstub_via), "out", err);
}

int32_t lstub_board_notice(const lstub_board *board, size_t index, lstub_notice *out, lstub_error *err)
{
    int32_t status = check_index(board, index, lstub_board_notice_count(board), err);
    return status < 0 ? status : lstub__give(&board->notices[index], sizeof(lstub_notice), out, sizeof(lstub_notice), "out", err);
}
