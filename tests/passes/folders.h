/* Small stacks as folders of PNG files in a scratch folder, and a pass to read them with. Needs
 * _GNU_SOURCE. */
#ifndef FW_TEST_FOLDERS_H
#define FW_TEST_FOLDERS_H

#include "check/stage.h"
#include "passes/feed.h"
#include "stack/png_write.h"

#include <ftw.h>
#include <stdio.h>
#include <sys/stat.h>
#include <unistd.h>

static char scratch[256];

static inline int scratch_open(void **state)
{
    (void)state;
    const char *above = getenv("TMPDIR");
    snprintf(scratch, sizeof scratch, "%s/falsework-passes-XXXXXX", above != NULL ? above : "/tmp");
    return mkdtemp(scratch) == NULL;
}

static inline int scratch_remove(const char *path, const struct stat *info, int kind,
                                 struct FTW *at)
{
    (void)info;
    (void)kind;
    (void)at;
    return remove(path);
}

static inline int scratch_close(void **state)
{
    (void)state;
    return nftw(scratch, scratch_remove, 16, FTW_DEPTH | FTW_PHYS);
}

#define FOLDER_TEST(test) cmocka_unit_test_setup_teardown(test, scratch_open, scratch_close)

static inline void folder_file(const stage *s, const char *folder, int32_t n)
{
    static const fw_png_format grey = {.depth = 8, .colour_type = 0};
    char path[600];
    fw_greys layer = stage_layer(s, n);
    fw_bytes bytes = {0};
    assert_int_equal(fw_png_encode(&layer, &grey, "layer", &bytes, NULL), FW_OK);
    snprintf(path, sizeof path, "%s/layer_%04d.png", folder, (int)n);
    FILE *file = fopen(path, "wb");
    assert_non_null(file);
    assert_int_equal(fwrite(bytes.data, 1, bytes.size, file), bytes.size);
    assert_int_equal(fclose(file), 0);
    fw_bytes_free(&bytes);
    fw_greys_free(&layer);
}

/* Writes the stage as a folder of this name and opens it. The caller closes the stack. */
static inline fw_stack *folder_of(const stage *s, const char *name)
{
    char folder[512];
    fw_stack *stack = NULL;
    fw_fault fault = {0};
    snprintf(folder, sizeof folder, "%s/%s", scratch, name);
    assert_int_equal(mkdir(folder, 0755), 0);
    for (int32_t n = 0; n < s->layers; n++)
        folder_file(s, folder, n);
    if (fw_stack_open(folder, NULL, &stack, &fault) != FW_OK)
        fail_msg("%s", fault.text);
    return stack;
}

/* Opened in place: a pass's memo points at the pass's own budget. */
static inline void pass_open(fw_pass *pass, int32_t batch)
{
    fw_pass_options options = fw_pass_defaults();
    options.threads = 2;
    options.batch = batch;
    assert_int_equal(fw_pass_open(&options, pass, NULL), FW_OK);
}

#endif
