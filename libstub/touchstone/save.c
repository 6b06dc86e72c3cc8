/* A Touchstone file at a path: whole or not at all. Standard C only, which knows neither links nor modes of files. */
#include "base/base.h"

#include <errno.h>
#include <stdio.h>
#include <string.h>

#define PATH_MOST 4000
#define TRIES 1000

static int32_t cannot_write(const char *path, const char *why, lstub_error *err)
{
    size_t length = strlen(path);
    return lstub__fail(err, LSTUB_E_WRITE, "path", -1, "cannot write '%s': %s", length <= 120 ? path : path + length - 120, why);
}

typedef struct target {
    FILE *stream;
    int   error;               /* errno of the first failure */
} target;

static int32_t write_stream(void *user, const void *bytes, size_t count)
{
    target *t = user;
    errno = 0;
    if (fwrite(bytes, 1, count, t->stream) == count)
        return 0;
    t->error = errno != 0 ? errno : EIO;
    return t->error;
}

static int there(const char *path)
{
    FILE *f = fopen(path, "rb");
    if (f != NULL)
        fclose(f);
    return f != NULL;
}

/* A name beside `path` that nothing has yet, opened; null: errno says why. */
static FILE *open_beside(const char *path, char name[PATH_MOST + 32])
{
    for (int i = 0; i < TRIES; i++) {
        sprintf(name, "%s.libstub-%d.part", path, i);
        if (!there(name)) {
            errno = 0;
            return fopen(name, "wb");
        }
    }
    errno = EEXIST;
    return NULL;
}

static int32_t fill(FILE *stream, const lstub_touchstone_data *data, const char *path, lstub_error *err)
{
    target t = {stream, 0};
    lstub_sink sink;
    LSTUB_INIT(sink);
    sink.write = write_stream;
    sink.user = &t;
    int32_t status = lstub_touchstone_write(data, &sink, err);
    errno = 0;
    if (fclose(stream) != 0 && status == LSTUB_OK) {
        status = LSTUB_E_WRITE;
        t.error = errno;
    }
    return status == LSTUB_E_WRITE ? cannot_write(path, strerror(t.error), err) : status;
}

/* What has no length (a device, a pipe) is no file to be replaced, and an empty file has nothing to lose. */
static int32_t fill_in_place(FILE *stream, int is_file, const lstub_touchstone_data *data, const char *path, lstub_error *err)
{
    int32_t status = fill(stream, data, path, err);
    if (status < 0 && is_file && (stream = fopen(path, "wb")) != NULL)
        fclose(stream);
    return status;
}

int32_t lstub_touchstone_save(const lstub_touchstone_data *data, const char *path, lstub_error *err)
{
    char name[PATH_MOST + 32];
    FILE *f;
    int32_t status;
    if (lstub__need(path, "path", err) < 0)
        return LSTUB_E_NULL;
    if (strlen(path) > PATH_MOST)
        return cannot_write(path, "the path is too long", err);
    errno = 0;
    f = fopen(path, "r+b");
    int error = errno;
    if (f != NULL) {
        int found = fseek(f, 0, SEEK_END) == 0;
        if (!found || ftell(f) == 0)
            return fill_in_place(f, found, data, path, err);
        fclose(f);
    } else if (there(path)) {
        return cannot_write(path, strerror(error), err);
    }
    if ((f = open_beside(path, name)) == NULL)
        return cannot_write(path, strerror(errno), err);
    status = fill(f, data, path, err);
    errno = 0;
    if (status == LSTUB_OK && rename(name, path) != 0)
        status = cannot_write(path, strerror(errno), err);
    if (status < 0)
        remove(name);
    return status;
}
