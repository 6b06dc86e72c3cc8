#include "ipc2581/mark.h"

#include "ipc2581/number.h"
#include "ipc2581/xml.h"

#include <expat.h>
#include <string.h>

#define KEPT_MAX  (16u << 20)    /* bytes of what a Set repeats when it is split, and    */
#define TEXT_MAX  (256u << 20)   /* of all that is put into the file                     */
#define BLANK_MAX 256u           /* bytes of white space before a tag; more is not copied */

typedef struct buffer {
    char  *bytes;
    size_t used, room;
} buffer;

/* Holes of a Set that are drilled alike: a Set of their own when there are several such parts. */
typedef struct part {
    int64_t      at;             /* of the first hole's tag */
    lstub__piece blank;          /* white space before it   */
    int32_t      group[2];
} part;

/* An element that speaks of the whole Set. */
typedef struct kept {
    int64_t      at;
    lstub__piece raw, blank;
} kept;

typedef struct scan {
    const lstub_board *board;
    lstub__xml         xml;
    lstub__marking    *out;
    const lstub__mark *mark, *last;      /* the next one to be met, the end */
    buffer  text;                        /* pieces of the edits             */
    buffer  set;                         /* pieces of the Set that is open  */
    buffer *capture;                     /* raw text goes here, or null     */
    size_t  captured;                    /* where it began                  */
    int     capture_depth;               /* of the element kept             */
    char    blank[BLANK_MAX];            /* white space since the last tag  */
    size_t  blank_bytes;
    int     blank_mixed;                 /* other text or a comment too     */
    int     set_depth;                   /* 0: no Set open                  */
    lstub__piece set_tag, set_blank, set_name;
    lstub__list  parts, kepts;
    int     header_depth, header_seen;
    int64_t header_at, layer_at;         /* where Specs and Layers go in    */
    lstub__piece header_blank, header_prefix, layer_blank;
    int     layers;                      /* whether Layers do               */
    int     step_depth, step_seen;
} scan;

static const lstub__piece nothing = {0, 0};

/* ---- bytes kept ---------------------------------------------------------------------------------- */

static int add_bytes(scan *s, buffer *b, const char *bytes, size_t count)
{
    size_t most = b == &s->set ? KEPT_MAX : TEXT_MAX;
    if (count == 0 || s->xml.status < 0)
        return s->xml.status >= 0;
    if (count > most - b->used) {
        lstub__xml_fail(&s->xml, LSTUB_E_FORMAT, "path", "<Set>: more than %u bytes to repeat for holes drilled differently",
                        (unsigned)most);
        return 0;
    }
    if (b->used + count > b->room) {
        size_t room = 2 * (b->used + count) + 1024;
        char *larger = lstub__new(&s->board->alloc, room, 1, s->xml.err);
        if (larger == NULL) {
            lstub__xml_stop(&s->xml, LSTUB_E_MEMORY);
            return 0;
        }
        if (b->used > 0)
            memcpy(larger, b->bytes, b->used);
        lstub__free(&s->board->alloc, b->bytes);
        b->bytes = larger;
        b->room = room;
    }
    memcpy(b->bytes + b->used, bytes, count);
    b->used += count;
    return 1;
}

static lstub__piece keep(scan *s, buffer *b, const char *bytes, size_t count)
{
    lstub__piece piece;
    piece.at = b->used;
    piece.bytes = add_bytes(s, b, bytes, count) ? count : 0;
    return piece;
}

static lstub__piece keep_blank(scan *s, buffer *b) { return keep(s, b, s->blank, s->blank_mixed ? 0 : s->blank_bytes); }

static void copy_piece(scan *s, lstub__piece piece)   /* of the Set, into the edits */
{
    if (piece.bytes > 0)
        add_bytes(s, &s->text, s->set.bytes + piece.at, piece.bytes);
}

/* Everything that is no tag, as it stands in the file; tags too, where XML_DefaultCurrent asks for them. */
static void on_raw(void *user, const char *bytes, int count)
{
    scan *s = ((lstub__xml *)user)->user;
    int i;
    if (s->xml.status < 0)
        return;
    if (s->capture != NULL) {
        add_bytes(s, s->capture, bytes, (size_t)count);
        return;
    }
    for (i = 0; i < count; i++) {
        int white = bytes[i] == ' ' || bytes[i] == '\t' || bytes[i] == '\r' || bytes[i] == '\n';
        if (!white || s->blank_bytes == BLANK_MAX)
            s->blank_mixed = 1;
        else
            s->blank[s->blank_bytes++] = bytes[i];
    }
}

static lstub__piece keep_tag(scan *s, buffer *b)
{
    lstub__piece piece = nothing;
    if (s->capture != NULL)
        return piece;
    piece.at = b->used;
    s->capture = b;
    XML_DefaultCurrent(s->xml.parser);
    s->capture = NULL;
    piece.bytes = b->used - piece.at;
    return piece;
}

/* Qualified name in a start tag, and the part of it up to the colon. */
static lstub__piece name_in(const buffer *b, lstub__piece tag)
{
    lstub__piece name;
    name.at = tag.at + 1;
    for (name.bytes = 0; name.bytes + 1 < tag.bytes; name.bytes++)
        if (strchr(" \t\r\n/>", b->bytes[name.at + name.bytes]) != NULL)
            break;
    return name;
}

static lstub__piece prefix_in(const buffer *b, lstub__piece name)
{
    const char *colon = name.bytes > 0 ? memchr(b->bytes + name.at, ':', name.bytes) : NULL;
    name.bytes = colon != NULL ? (size_t)(colon - (b->bytes + name.at)) + 1 : 0;
    return name;
}

/* ---- edits --------------------------------------------------------------------------------------- */

static lstub__edit *add_edit(scan *s, int64_t at)
{
    lstub__edit *edit = lstub__list_add(&s->out->edits, s->xml.err);
    if (edit == NULL) {
        lstub__xml_stop(&s->xml, LSTUB_E_MEMORY);
        return NULL;
    }
    edit->at = at;
    edit->group[0] = edit->group[1] = -1;
    return edit;
}

static lstub__piece since(const scan *s, size_t at)
{
    lstub__piece piece;
    piece.at = at;
    piece.bytes = s->text.used - at;
    return piece;
}

/* What goes in before the first hole of a part: a new Set but for the first part, what the Set says of itself, and the
   SpecRefs. */
static void edit_part(scan *s, size_t number, int64_t from, int64_t to)
{
    const part *p = LSTUB__ITEM(s->parts, part, number);
    size_t i, at = s->text.used;
    lstub__piece raw, blank, prefix;
    lstub__edit *edit;
    if (number > 0) {
        add_bytes(s, &s->text, "</", 2);
        copy_piece(s, s->set_name);
        add_bytes(s, &s->text, ">", 1);
        copy_piece(s, s->set_blank);
        copy_piece(s, s->set_tag);
    }
    for (i = 0; i < s->kepts.count; i++) {
        const kept *k = LSTUB__ITEM(s->kepts, kept, i);
        if (k->at >= from && k->at < to)
            continue;
        if (number > 0)
            copy_piece(s, k->blank);
        copy_piece(s, k->raw);
        if (number == 0)
            copy_piece(s, p->blank);
    }
    if (number > 0)
        copy_piece(s, p->blank);
    raw = since(s, at);
    copy_piece(s, p->blank);
    blank = since(s, raw.at + raw.bytes);
    copy_piece(s, prefix_in(&s->set, s->set_name));
    prefix = since(s, blank.at + blank.bytes);
    edit = s->xml.status < 0 ? NULL : add_edit(s, p->at);
    if (edit == NULL)
        return;
    edit->raw = raw;
    edit->blank = blank;
    edit->prefix = prefix;
    edit->group[0] = p->group[0];
    edit->group[1] = p->group[1];
}

static void end_set(scan *s)
{
    size_t i, count = s->parts.count;
    int drilled = count > 1;
    if (count == 1) {
        const part *only = LSTUB__ITEM(s->parts, part, 0);
        drilled = only->group[0] >= 0 || only->group[1] >= 0;
    }
    if (drilled)
        for (i = 0; i < count && s->xml.status >= 0; i++)
            edit_part(s, i, i == 0 ? 0 : LSTUB__ITEM(s->parts, part, i)->at,
                      i + 1 < count ? LSTUB__ITEM(s->parts, part, i + 1)->at : INT64_MAX);
    s->set_depth = 0;
    s->set.used = 0;
    s->parts.count = s->kepts.count = 0;
}

/* ---- what the parser reports --------------------------------------------------------------------- */

static int64_t here(const scan *s) { return (int64_t)XML_GetCurrentByteIndex(s->xml.parser); }

static int64_t behind(const scan *s) { return here(s) + XML_GetCurrentByteCount(s->xml.parser); }

static void start_hole(scan *s)
{
    static const int32_t none[2] = {-1, -1};
    const int32_t *group = none;
    const part *before;
    part *p;
    if (s->mark < s->last && s->mark->ordinal == s->xml.holes) {
        group = s->mark->group;
        s->mark++;
    }
    if (s->set_depth == 0 || s->xml.depth != s->set_depth + 1) {
        if (group != none)
            lstub__xml_fail(&s->xml, LSTUB_E_FORMAT, "path", "<Hole> is not in a <Set>: no place for its back-drill");
        return;
    }
    before = s->parts.count > 0 ? LSTUB__ITEM(s->parts, part, s->parts.count - 1) : NULL;
    if (before != NULL && before->group[0] == group[0] && before->group[1] == group[1])
        return;
    p = lstub__list_add(&s->parts, s->xml.err);
    if (p == NULL) {
        lstub__xml_stop(&s->xml, LSTUB_E_MEMORY);
        return;
    }
    p->at = here(s);
    p->group[0] = group[0];
    p->group[1] = group[1];
    p->blank = keep_blank(s, &s->set);
}

/* Elements of a Set that describe all of it, where the others are things of their own, there once. */
static int speaks_of_set(const char *name, size_t bytes)
{
    static const char *const names[] = {"NonstandardAttribute", "SpecRef", "ColorRef", "Color", "LineDescRef", "LineDesc",
                                        "FillDescRef", "FillDesc"};
    size_t i;
    for (i = 0; i < sizeof names / sizeof *names; i++)
        if (strlen(names[i]) == bytes && memcmp(names[i], name, bytes) == 0)
            return 1;
    return 0;
}

static void start_in_set(scan *s)
{
    lstub__piece blank = keep_blank(s, &s->set), tag = keep_tag(s, &s->set), name = name_in(&s->set, tag),
                 prefix = prefix_in(&s->set, name);
    kept *k;
    if (s->xml.status < 0)
        return;
    if (!speaks_of_set(s->set.bytes + name.at + prefix.bytes, name.bytes - prefix.bytes)) {
        s->set.used = blank.at;
        return;
    }
    k = lstub__list_add(&s->kepts, s->xml.err);
    if (k == NULL) {
        lstub__xml_stop(&s->xml, LSTUB_E_MEMORY);
        return;
    }
    k->at = here(s);
    k->blank = blank;
    k->raw.at = tag.at;
    s->capture = &s->set;                /* to its end */
    s->capture_depth = s->xml.depth;
}

static void start_set(scan *s)
{
    s->set_depth = s->xml.depth;
    s->set_blank = keep_blank(s, &s->set);
    s->set_tag = keep_tag(s, &s->set);
    s->set_name = name_in(&s->set, s->set_tag);
}

static void start_header(scan *s)
{
    lstub__piece tag = keep_tag(s, &s->text);
    if (s->xml.status < 0)
        return;
    if (s->text.bytes[tag.at + tag.bytes - 2] == '/') {
        lstub__xml_fail(&s->xml, LSTUB_E_FORMAT, "path", "<CadHeader> is empty: no place for the back-drill Specs");
        return;
    }
    s->header_seen = 1;
    s->header_depth = s->xml.depth;
    s->header_at = behind(s);
    s->header_prefix = prefix_in(&s->text, name_in(&s->text, tag));
    s->header_blank = keep_blank(s, &s->text);
    if (s->header_blank.bytes > 0)
        s->header_blank.bytes += keep(s, &s->text, "  ", 2).bytes;
}

/* The number of a Spec or Layer that is called like ours: ours get higher ones. */
static void note_name(scan *s, const char *name)
{
    size_t start = strlen(LSTUB__SPEC_BOTTOM), digits;
    int64_t number = 0;
    if (strncmp(name, LSTUB__SPEC_BOTTOM, start) != 0) {
        start = strlen(LSTUB__SPEC_TOP);
        if (strncmp(name, LSTUB__SPEC_TOP, start) != 0)
            return;
    }
    for (digits = strspn(name + start, "0123456789"); digits > 0 && number < INT64_C(1000000000000000); digits--)
        number = 10 * number + (name[start++] - '0');
    if (number > s->out->taken)
        s->out->taken = number;
}

static void add_place(scan *s, int kind, int64_t at, lstub__piece blank)
{
    lstub__edit *edit = add_edit(s, at);
    if (edit == NULL)
        return;
    edit->kind = kind;
    edit->blank = blank;
    edit->prefix = s->header_prefix;
}

static void start_step(scan *s)
{
    s->step_seen = 1;
    s->step_depth = s->xml.depth;
    add_place(s, EDIT_LAYERS, s->layer_at, s->layer_blank);
}

static void on_start(lstub__xml *xml, int element, const char **attributes)
{
    scan *s = xml->user;
    if (xml->depth == 1)
        XML_SetDefaultHandler(xml->parser, on_raw);
    if (element == EL_HOLE)
        start_hole(s);
    if (s->capture != NULL)
        XML_DefaultCurrent(xml->parser);
    else if (s->set_depth == 0 && element == EL_SET)
        start_set(s);
    else if (s->set_depth != 0 && xml->depth == s->set_depth + 1 && element != EL_HOLE)
        start_in_set(s);
    else if (element == EL_CAD_HEADER && !s->header_seen)
        start_header(s);
    else if (element == EL_SPEC && s->header_depth > 0 && xml->depth == s->header_depth + 1)
        s->header_blank = keep_blank(s, &s->text);
    else if (element == EL_LAYER)
        s->layer_blank = keep_blank(s, &s->text);
    else if (element == EL_STEP && s->layers && !s->step_seen && lstub__xml_is(attributes, "name", s->board->step))
        start_step(s);
    if (element == EL_SPEC || element == EL_LAYER)
        note_name(s, lstub__xml_text(attributes, "name"));
    s->blank_bytes = 0;
    s->blank_mixed = 0;
}

static void on_end(lstub__xml *xml, int element)
{
    scan *s = xml->user;
    if (s->capture != NULL) {
        XML_DefaultCurrent(xml->parser);
        if (xml->depth == s->capture_depth) {
            kept *k = LSTUB__ITEM(s->kepts, kept, s->kepts.count - 1);
            k->raw.bytes = s->set.used - k->raw.at;
            s->capture = NULL;
        }
    } else if (xml->depth == s->set_depth) {
        end_set(s);
    } else if (xml->depth == s->header_depth) {
        add_place(s, EDIT_SPECS, s->header_at, s->header_blank);
        s->header_depth = 0;
    } else if (xml->depth == s->step_depth) {
        add_place(s, EDIT_HOLES, here(s), keep_blank(s, &s->text));
        s->step_depth = 0;
    } else if (element == EL_LAYER) {
        s->layer_at = behind(s);
    } else if (element == EL_SPEC && s->header_depth > 0 && xml->depth == s->header_depth + 1) {
        s->header_at = behind(s);
    }
    s->blank_bytes = 0;
    s->blank_mixed = 0;
}

/* ---- the pass ------------------------------------------------------------------------------------ */

int32_t lstub__file_changed(const lstub_board *board, lstub_error *err)
{
    return lstub__fail(err, LSTUB_E_FORMAT, "board", -1, "'%s': the file has changed since the board was read",
                       lstub__path_tail(board->path));
}

static int32_t finish(const scan *s, lstub_error *err)
{
    if (s->xml.crc != s->board->source_crc || s->xml.bytes != s->board->source_bytes)
        return lstub__file_changed(s->board, err);
    if (!s->header_seen)
        return lstub__fail(err, LSTUB_E_FORMAT, "board", -1, "'%s' has no <CadHeader>: no place for the back-drill Specs",
                           lstub__path_tail(s->board->path));
    if (s->layers && (!s->step_seen || s->layer_at == 0))
        return lstub__fail(err, LSTUB_E_FORMAT, "board", -1, "'%s' has no <Layer> before <Step> '%.40s': no place for a drill layer",
                           lstub__path_tail(s->board->path), s->board->step);
    if (s->mark < s->last)
        return lstub__fail(err, LSTUB_E_FORMAT, "board", -1, "'%s' has no <Hole> number %ld: no place for its back-drill",
                           lstub__path_tail(s->board->path), (long)s->mark->ordinal);
    return LSTUB_OK;
}

int32_t lstub__marking_make(lstub__marking *marking, const lstub_board *board, const lstub__mark *marks, size_t count,
                            int layers, lstub_error *err)
{
    const lstub_allocator *alloc = &board->alloc;
    scan s;
    int32_t status;
    memset(&s, 0, sizeof s);
    memset(marking, 0, sizeof *marking);
    lstub__list_init(&marking->edits, alloc, sizeof(lstub__edit));
    lstub__list_init(&s.parts, alloc, sizeof(part));
    lstub__list_init(&s.kepts, alloc, sizeof(kept));
    s.board = board;
    s.out = marking;
    s.mark = marks;
    s.last = marks + count;
    s.layers = layers;
    s.xml.start = on_start;
    s.xml.end = on_end;
    s.xml.user = &s;
    s.xml.err = err;
    status = lstub__xml_read(&s.xml, board->path);
    if (status == LSTUB_OK)
        status = finish(&s, err);
    lstub__list_clear(&s.parts);
    lstub__list_clear(&s.kepts);
    lstub__free(alloc, s.set.bytes);
    marking->text = s.text.bytes;
    return status;
}

void lstub__marking_clear(lstub__marking *marking, const lstub_board *board)
{
    lstub__list_clear(&marking->edits);
    lstub__free(&board->alloc, marking->text);
    marking->text = NULL;
}
