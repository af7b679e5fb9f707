/* falsework-part NAME DIR [--layers N]: writes the raw masks of a demo part into DIR. */
#define _POSIX_C_SOURCE 200809L

#include "models.h"
#include "raster.h"

#include <errno.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <sys/stat.h>

enum { PATH = 4096 };

static int fail(int status, const char *what, const char *where, const char *advice)
{
    fprintf(stderr, "falsework-part: %s, %s, %s\n", what, where, advice);
    return status;
}

static int usage(void)
{
    fputs("usage: falsework-part NAME DIR [--layers N]\nparts:", stderr);
    for (int i = 0; i < PART_MODEL_COUNT; ++i)
        fprintf(stderr, " %s (%d layers)", PART_MODELS[i].name, PART_MODELS[i].layers);
    fputc('\n', stderr);
    return 2;
}

static const part_model *find_model(const char *name)
{
    for (int i = 0; i < PART_MODEL_COUNT; ++i)
        if (strcmp(PART_MODELS[i].name, name) == 0)
            return &PART_MODELS[i];
    return NULL;
}

static int write_layer(const part_model *model, int layer, const char *folder, uint8_t *grey)
{
    char path[PATH];
    int length = snprintf(path, sizeof path, "%s/layer_%04d.png", folder, layer + 1);
    if (length < 0 || length >= PATH)
        return fail(2, "path too long", folder, "name a shorter folder");
    part_raster(model, layer, grey);
    int error = part_write_png(path, grey, model->width_px, model->height_px);
    return error ? fail(3, strerror(error), path, "name a folder that can be written") : 0;
}

static int write_stack(const part_model *model, int layers, const char *folder)
{
    uint8_t *grey = malloc((size_t)model->width_px * (size_t)model->height_px);
    int status = grey ? 0 : fail(3, "out of memory", model->name, "free some memory");
    if (!status && mkdir(folder, 0777) && errno != EEXIST)
        status = fail(3, strerror(errno), folder, "name a folder that can be made");
    for (int layer = 0; !status && layer < layers; ++layer)
        status = write_layer(model, layer, folder, grey);
    free(grey);
    if (!status)
        printf("%s: %d layers of %d x %d px in %s\n", model->name, layers, model->width_px,
               model->height_px, folder);
    return status;
}

int main(int argc, char **argv)
{
    const part_model *model = argc >= 3 ? find_model(argv[1]) : NULL;
    if (!model || (argc != 3 && argc != 5) || (argc == 5 && strcmp(argv[3], "--layers") != 0))
        return usage();
    long layers = argc == 5 ? strtol(argv[4], NULL, 10) : model->layers;
    if (layers < 1 || layers > model->layers)
        return usage();
    return write_stack(model, (int)layers, argv[2]);
}
