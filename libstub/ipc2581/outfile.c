#define _XOPEN_SOURCE 700   /* open, fsync, realpath */

#include "ipc2581/outfile.h"

#include "base/base.h"
#include "ipc2581/number.h"

#include <errno.h>
#include <fcntl.h>
#include <limits.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>
#include <unistd.h>
#include <zlib.h>

#define BLOCK 65536u
#define NO_MEMORY (-1)    /* where an errno stands otherwise; the message is there */
#define GZIP  (15 + 16)   /* zlib's window bits for a gzip header, which then holds no time */

struct lstub__outfile {
    lstub_allocator alloc;
    const char *path;          /* the caller's */
    char       *target;        /* where links lead */
    char       *temp;          /* null: written in place, for a device or a pipe */
    int         file, error;   /* errno of the first failure */
    int         zipped;
    z_stream    zip;
    size_t      used;
    unsigned char block[BLOCK], packed[BLOCK];
};

static int32_t cannot_write(const char *path, int error, lstub_error *err)
{
    return lstub__fail(err, LSTUB_E_WRITE, "path", -1, "cannot write '%s': %s", lstub__path_tail(path), strerror(error));
}

static void write_all(lstub__outfile *out, const unsigned char *bytes, size_t count)
{
    while (count > 0 && out->error == 0) {
        ssize_t done = write(out->file, bytes, count);
        if (done < 0 && errno != EINTR)
            out->error = errno;
        if (done > 0) {
            bytes += done;
            count -= (size_t)done;
        }
    }
}

static void pack(lstub__outfile *out, int flush)
{
    int result;
    out->zip.next_in = out->block;
    out->zip.avail_in = (uInt)out->used;
    do {
        out->zip.next_out = out->packed;
        out->zip.avail_out = BLOCK;
        result = deflate(&out->zip, flush);
        write_all(out, out->packed, BLOCK - out->zip.avail_out);
    } while (result == Z_OK && out->zip.avail_out == 0 && out->error == 0);
    if (result == Z_STREAM_ERROR && out->error == 0)
        out->error = EIO;
}

static void flush_block(lstub__outfile *out, int last)
{
    if (out->zipped)
        pack(out, last ? Z_FINISH : Z_NO_FLUSH);
    else
        write_all(out, out->block, out->used);
    out->used = 0;
}

void lstub__out_bytes(lstub__outfile *out, const void *bytes, size_t count)
{
    const unsigned char *from = bytes;
    while (count > 0 && out->error == 0) {
        size_t part = BLOCK - out->used < count ? BLOCK - out->used : count;
        memcpy(out->block + out->used, from, part);
        out->used += part;
        from += part;
        count -= part;
        if (out->used == BLOCK)
            flush_block(out, 0);
    }
}

void lstub__out_text(lstub__outfile *out, const char *text) { lstub__out_bytes(out, text, strlen(text)); }

static void *zip_allocate(void *user, uInt items, uInt bytes)
{
    const lstub_allocator *alloc = user;
    return alloc->allocate(alloc->user, (size_t)items * bytes);
}

static void zip_release(void *user, void *memory) { lstub__free(user, memory); }

static int ends_in_gz(const char *path)
{
    size_t length = strlen(path);
    return length > 3 && strcmp(path + length - 3, ".gz") == 0;
}

/* errno, or 0 */
static int create_temp(lstub__outfile *out, mode_t mode)
{
    const char *slash = strrchr(out->target, '/');
    int folder = slash == NULL ? 0 : (int)(slash - out->target) + 1, number;
    for (number = 0; number < 1000; number++) {
        sprintf(out->temp, "%.*s.libstub-%ld-%d.part", folder, out->target, (long)getpid(), number);
        out->file = open(out->temp, O_WRONLY | O_CREAT | O_EXCL | O_CLOEXEC, mode);
        if (out->file >= 0)
            return 0;
        if (errno != EEXIST)
            break;
    }
    return errno;
}

/* Follows links, so that a link stays one; keeps the mode of the file that is replaced. errno, 0 or NO_MEMORY */
static int open_target(lstub__outfile *out, lstub_error *err)
{
    struct stat there;
    size_t bytes = PATH_MAX > strlen(out->path) ? PATH_MAX : strlen(out->path) + 1;
    int error, exists = 0;
    out->target = lstub__new(&out->alloc, bytes, 1, err);
    out->temp = lstub__new(&out->alloc, bytes + 64, 1, err);
    if (out->target == NULL || out->temp == NULL)
        return NO_MEMORY;
    if (lstat(out->path, &there) == 0 && S_ISLNK(there.st_mode)) {
        if (realpath(out->path, out->target) == NULL)
            return errno;
    } else {
        strcpy(out->target, out->path);
    }
    if (stat(out->target, &there) == 0) {
        if (S_ISDIR(there.st_mode))
            return EISDIR;
        if (access(out->target, W_OK) != 0)
            return errno;
        if (!S_ISREG(there.st_mode)) {
            lstub__free(&out->alloc, out->temp);
            out->temp = NULL;
            out->file = open(out->target, O_WRONLY | O_CLOEXEC);
            return out->file < 0 ? errno : 0;
        }
        exists = 1;
    } else if (errno != ENOENT) {
        return errno;
    }
    error = create_temp(out, exists ? 0600 : 0666);
    if (error == 0 && exists && fchmod(out->file, there.st_mode & 0777) != 0)
        error = errno;
    return error;
}

int32_t lstub__out_open(const char *path, const lstub_allocator *allocator, lstub__outfile **result, lstub_error *err)
{
    lstub__outfile *out;
    int error;
    if (path == NULL)
        return lstub__fail(err, LSTUB_E_NULL, "path", -1, "path = null: must name a file");
    out = lstub__new(allocator, 1, sizeof *out, err);
    if (out == NULL)
        return LSTUB_E_MEMORY;
    out->alloc = *allocator;
    out->path = path;
    out->file = -1;
    error = open_target(out, err);
    if (error != 0) {
        int32_t status = error == NO_MEMORY ? LSTUB_E_MEMORY : cannot_write(path, error, err);
        return lstub__out_close(out, status, NULL);
    }
    if (ends_in_gz(path)) {
        out->zip.zalloc = zip_allocate;
        out->zip.zfree = zip_release;
        out->zip.opaque = &out->alloc;
        if (deflateInit2(&out->zip, Z_DEFAULT_COMPRESSION, Z_DEFLATED, GZIP, 8, Z_DEFAULT_STRATEGY) != Z_OK) {
            lstub__fail(err, LSTUB_E_MEMORY, "allocator", -1, "out of memory: compression of '%s'", lstub__path_tail(path));
            return lstub__out_close(out, LSTUB_E_MEMORY, NULL);
        }
        out->zipped = 1;
    }
    *result = out;
    return LSTUB_OK;
}

static void finish(lstub__outfile *out)
{
    flush_block(out, 1);
    if (out->error == 0 && out->temp != NULL && fsync(out->file) != 0)
        out->error = errno;
}

int32_t lstub__out_close(lstub__outfile *out, int32_t status, lstub_error *err)
{
    int created = out->file >= 0 && out->temp != NULL;
    if (out->file >= 0 && status >= 0)
        finish(out);
    if (out->file >= 0 && close(out->file) != 0 && out->error == 0)
        out->error = errno;
    if (status >= 0 && out->error == 0 && created && rename(out->temp, out->target) != 0)
        out->error = errno;
    if (created && (status < 0 || out->error != 0))
        unlink(out->temp);
    if (status >= 0 && out->error != 0)
        status = cannot_write(out->path, out->error, err);
    if (out->zipped)
        deflateEnd(&out->zip);
    lstub_allocator alloc = out->alloc;
    lstub__free(&alloc, out->target);
    lstub__free(&alloc, out->temp);
    lstub__free(&alloc, out);
    return status;
}
