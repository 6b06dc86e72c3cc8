/* Reads a Touchstone file, and answers what is in it. */
#include "touchstone/touchstone.h"

#include <errno.h>
#include <stdio.h>
#include <string.h>

/* ---- lines ------------------------------------------------------------------------------------------- */

static int32_t keep_comment(lstub__reader *r, const char *p)
{
    lstub_touchstone *file = r->file;
    size_t bytes = 0;
    while (p[bytes] != '\n')
        bytes++;
    while (r->text_used + bytes + 1 > r->text_room) {
        char *moved = lstub__grow(&file->alloc, file->text, r->text_room, &r->text_room, 1, r->err);
        if (moved == NULL)
            return LSTUB_E_MEMORY;
        file->text = moved;
    }
    memcpy(file->text + r->text_used, p, bytes);
    file->text[r->text_used + bytes] = '\0';
    r->text_used += bytes + 1;
    file->data.comment_count++;
    return LSTUB_OK;
}

/* The first line of data of version 1. */
static int32_t start_version_1(lstub__reader *r)
{
    lstub_touchstone_data *d = &r->file->data;
    if (r->option.line == 0)
        return lstub__lines_fail(&r->in, NULL, r->err, "data before an option line ('#')");
    for (int i = 0; i < LSTUB_PORTS_MAX; i++)
        r->file->reference[i] = r->option.reference;
    d->ports = r->ports_asked;
    r->part = LSTUB__NETWORK;
    if (d->ports == 0)
        return LSTUB_OK;
    if (d->ports != 2 && (r->option.parameter == LSTUB_NETWORK_G || r->option.parameter == LSTUB_NETWORK_H))
        return lstub__lines_fail_at(r->option.line, r->err, "G and H parameters in a file of %ld ports: for two ports only", (long)d->ports);
    lstub__points_start(r);
    return LSTUB_OK;
}

static int32_t read_line(lstub__reader *r)
{
    const char *p = lstub__blanks(r->in.text);
    int32_t status;
    int data = r->part > LSTUB__INFORMATION || (r->file->data.version == 1 && !lstub__at_end(p) && *p != '#' && *p != '[');
    if (!data) {
        const char *comment = p;
        while (!lstub__at_end(comment))
            comment++;
        if (*comment == '!' && (status = keep_comment(r, comment + 1)) < 0)
            return status;
    }
    if (lstub__at_end(p))
        return LSTUB_OK;
    if (*p == '[' && r->part != LSTUB__END)
        return lstub__read_keyword(r, p);
    switch (r->part) {
    case LSTUB__INFORMATION:
        return LSTUB_OK;
    case LSTUB__END:
        return lstub__lines_fail(&r->in, p, r->err, "text after [End]");
    case LSTUB__HEAD:
        if (r->references_due > 0 || r->rows_due > 0)
            return lstub__read_list(r, p);
        if (*p == '#')
            return lstub__read_option_line(r, p);
        if (r->file->data.version == 2)
            return lstub__lines_fail(&r->in, p, r->err, "neither a keyword nor a comment, before [Network Data]");
        if ((status = start_version_1(r)) < 0)
            return status;
        break;
    default:
        if (*p == '#')
            return lstub__read_option_line(r, p);
        break;
    }
    return lstub__read_numbers(r, p);
}

static int32_t finish(lstub__reader *r)
{
    lstub_touchstone *file = r->file;
    lstub_touchstone_data *d = &file->data;
    if (d->version == 2 && r->part != LSTUB__END)
        return lstub__lines_fail(&r->in, NULL, r->err, "the file ends without [End]");
    if (d->version == 1 && r->part == LSTUB__HEAD)
        return lstub__lines_fail(&r->in, NULL, r->err, "no data");
    return d->version == 1 ? lstub__points_done(r) : LSTUB_OK;
}

/* ---- handle ------------------------------------------------------------------------------------------ */

/* An array that has grown, cut to what is used; it is left as it is where there is no memory for that. */
static double *fitted(const lstub_allocator *alloc, double *array, size_t count, size_t room)
{
    double *exact = room > count + count / 8 ? lstub__new(alloc, count, sizeof *array, NULL) : NULL;
    if (exact == NULL)
        return array;
    memcpy(exact, array, count * sizeof *array);
    lstub__free(alloc, array);
    return exact;
}

static int32_t settle(lstub__reader *r)
{
    lstub_touchstone *file = r->file;
    lstub_touchstone_data *d = &file->data;
    size_t numbers = 2 * (size_t)d->ports * (size_t)d->ports, i;
    const char *text = file->text;
    if (d->comment_count > 0 && (file->comments = lstub__new(&file->alloc, d->comment_count, sizeof *file->comments, r->err)) == NULL)
        return LSTUB_E_MEMORY;
    for (i = 0; i < d->comment_count; i++) {
        file->comments[i] = text;
        text += strlen(text) + 1;
    }
    file->freq = fitted(&file->alloc, file->freq, d->points, r->room);
    file->values = fitted(&file->alloc, file->values, d->points * numbers, r->room * numbers);
    d->comments = file->comments;
    d->freq = file->freq;
    d->data = file->values;
    d->reference = file->reference;
    return LSTUB_OK;
}

static int32_t read_all(lstub__reader *r)
{
    int32_t more, status = LSTUB_OK;
    while ((more = lstub__lines_next(&r->in, r->err)) > 0)
        if ((status = read_line(r)) < 0)
            return status;
    if (more < 0 || (status = finish(r)) < 0)
        return more < 0 ? more : status;
    return settle(r);
}

void lstub_touchstone_destroy(lstub_touchstone *file)
{
    if (file == NULL)
        return;
    lstub_allocator alloc = file->alloc;
    lstub__free(&alloc, file->freq);
    lstub__free(&alloc, file->values);
    lstub__free(&alloc, file->text);
    lstub__free(&alloc, (void *)file->comments);
    lstub__free(&alloc, file);
}

/* bytes: how many the source has, 0 if that is not known. */
static int32_t read_source(const lstub_source *source, double bytes, int32_t ports, const lstub_allocator *allocator,
                           lstub_touchstone **out, lstub_error *err)
{
    lstub_allocator alloc;
    lstub_source from;
    int32_t status;
    if ((status = lstub__need(out, "out", err)) < 0 || (status = lstub__allocator(allocator, &alloc, err)) < 0
        || (status = lstub__take(&from, sizeof from, source, sizeof from, "source", err)) < 0)
        return status;
    if (from.read == NULL)
        return lstub__fail(err, LSTUB_E_NULL, "source", -1, "source: read must not be null");
    if (ports < 0 || ports > LSTUB_PORTS_MAX)
        return lstub__fail(err, LSTUB_E_ARGUMENT, "ports", -1, "ports = %ld: must be >= 1 and <= %d, or 0: not known", (long)ports,
                           LSTUB_PORTS_MAX);
    lstub__reader *r = lstub__new(&alloc, 1, sizeof *r, err);
    char *buffer = lstub__new(&alloc, LSTUB__BUFFER, 1, err);
    lstub_touchstone *file = lstub__new(&alloc, 1, sizeof *file, err);
    status = LSTUB_E_MEMORY;
    if (r != NULL && buffer != NULL && file != NULL) {
        file->alloc = alloc;
        LSTUB_INIT(file->data);
        file->data.version = 1;
        r->file = file;
        r->err = err;
        r->ports_asked = ports;
        r->bytes_said = bytes;
        r->in.source = from;
        r->in.buffer = buffer;
        status = read_all(r);
        if (status == LSTUB_OK)
            *out = file;
        else
            lstub_touchstone_destroy(file);
    } else {
        lstub__free(&alloc, file);
    }
    lstub__free(&alloc, buffer);
    lstub__free(&alloc, r);
    return status;
}

int32_t lstub_touchstone_read(const lstub_source *source, int32_t ports, const lstub_allocator *allocator,
                              lstub_touchstone **out, lstub_error *err)
{
    return read_source(source, 0.0, ports, allocator, out, err);
}

int32_t lstub_touchstone_get(const lstub_touchstone *file, lstub_touchstone_data *out, lstub_error *err)
{
    if (lstub__need(file, "file", err) < 0)
        return LSTUB_E_NULL;
    return lstub__give(&file->data, sizeof file->data, out, sizeof file->data, "out", err);
}

/* ---- sources ----------------------------------------------------------------------------------------- */

typedef struct memory {
    const char *text;
    size_t      left;
} memory;

static size_t read_memory(void *user, void *buffer, size_t bytes)
{
    memory *m = user;
    size_t n = m->left < bytes ? m->left : bytes;
    if (n > 0)
        memcpy(buffer, m->text, n);
    m->text += n;
    m->left -= n;
    return n;
}

int32_t lstub_touchstone_parse(const char *text, size_t bytes, int32_t ports, const lstub_allocator *allocator,
                               lstub_touchstone **out, lstub_error *err)
{
    memory m = {text, bytes};
    lstub_source source;
    if (bytes > 0 && lstub__need(text, "text", err) < 0)
        return LSTUB_E_NULL;
    LSTUB_INIT(source);
    source.read = read_memory;
    source.user = &m;
    return read_source(&source, (double)bytes, ports, allocator, out, err);
}

typedef struct open_file {
    FILE *stream;
    int   error;               /* errno */
} open_file;

static size_t read_file(void *user, void *buffer, size_t bytes)
{
    open_file *f = user;
    errno = 0;
    size_t n = fread(buffer, 1, bytes, f->stream);
    if (n == 0 && ferror(f->stream)) {
        f->error = errno;
        return SIZE_MAX;
    }
    return n;
}

/* Of a path that ends in .s4p, .Z2P ...; 0: it says nothing; more than there may be: LSTUB_PORTS_MAX + 1. */
static int32_t ports_of_path(const char *path)
{
    const char *p = strrchr(path, '.');
    int32_t n = 0;
    if (p == NULL || p[1] == '\0' || strchr("sSyYzZgGhH", p[1]) == NULL)
        return 0;
    for (p += 2; *p >= '0' && *p <= '9'; p++)
        if (n <= LSTUB_PORTS_MAX)
            n = 10 * n + (*p - '0');
    if (n == 0 || (*p != 'p' && *p != 'P') || p[1] != '\0')
        return 0;
    return n <= LSTUB_PORTS_MAX ? n : LSTUB_PORTS_MAX + 1;
}

static const char *tail(const char *path)
{
    size_t length = strlen(path);
    return length <= 120 ? path : path + length - 120;
}

int32_t lstub_touchstone_load(const char *path, int32_t ports, const lstub_allocator *allocator, lstub_touchstone **out,
                              lstub_error *err)
{
    open_file f = {NULL, 0};
    lstub_source source;
    int32_t status;
    if (lstub__need(path, "path", err) < 0)
        return LSTUB_E_NULL;
    if (ports == 0 && (ports = ports_of_path(path)) > LSTUB_PORTS_MAX)
        return lstub__fail(err, LSTUB_E_UNSUPPORTED, "path", -1, "'%s': more than %d ports", tail(path), LSTUB_PORTS_MAX);
    errno = 0;
    if ((f.stream = fopen(path, "rb")) == NULL)
        return lstub__fail(err, LSTUB_E_READ, "path", -1, "cannot read '%s': %s", tail(path), strerror(errno));
    LSTUB_INIT(source);
    source.read = read_file;
    source.user = &f;
    long bytes = fseek(f.stream, 0, SEEK_END) == 0 ? ftell(f.stream) : 0;      /* a pipe has no length */
    rewind(f.stream);
    status = read_source(&source, bytes > 0 ? (double)bytes : 0.0, ports, allocator, out, err);
    fclose(f.stream);
    if (status == LSTUB_E_READ)
        lstub__fail(err, LSTUB_E_READ, "path", -1, "cannot read '%s': %s", tail(path), strerror(f.error));
    return status;
}
