/* A folder of its own for each test program, and files in it. Needs _POSIX_C_SOURCE 200809L. */
#ifndef TESTS_CARDS_SCRATCH_H
#define TESTS_CARDS_SCRATCH_H

#include <setjmp.h>
#include <stdarg.h>
#include <stddef.h>
#include <stdint.h>

#include <cmocka.h>

#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <unistd.h>

static char scratch_folder[64];

static int scratch_make(void **state)
{
    (void)state;
    strcpy(scratch_folder, "/tmp/falsework-cards-XXXXXX");
    return mkdtemp(scratch_folder) == NULL;
}

/* The path of name in the folder; in one of four buffers in turn. */
static const char *scratch_path(const char *name)
{
    static char path[4][160];
    static int turn;
    turn = (turn + 1) % 4;
    snprintf(path[turn], sizeof path[turn], "%s/%s", scratch_folder, name);
    return path[turn];
}

static const char *scratch_bytes(const char *name, const void *bytes, size_t count)
{
    const char *path = scratch_path(name);
    unlink(path); /* some file systems flush a file that is written over: slow, a thousand times */
    FILE *file = fopen(path, "wb");
    assert_non_null(file);
    assert_int_equal(fwrite(bytes, 1, count, file), count);
    assert_int_equal(fclose(file), 0);
    return path;
}

static inline const char *scratch_text(const char *name, const char *text)
{
    return scratch_bytes(name, text, strlen(text));
}

/* text with the only occurrence of `from` replaced by `to`, in a static buffer. */
static inline const char *scratch_replaced(const char *text, const char *from, const char *to)
{
    static char out[8192];
    const char *at = strstr(text, from);
    assert_non_null(at);
    assert_null(strstr(at + 1, from));
    snprintf(out, sizeof out, "%.*s%s%s", (int)(at - text), text, to, at + strlen(from));
    return out;
}

/* Removes the folder with the files named (NULL ends the list), as far as they are there. */
static inline void scratch_remove(const char *const *name)
{
    for (; *name != NULL; name++)
        unlink(scratch_path(*name));
    assert_int_equal(rmdir(scratch_folder), 0);
}

#endif
