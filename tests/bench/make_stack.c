/* Makes a stack of masks for the benchmark: bench_make_stack FOLDER WIDTH HEIGHT LAYERS CLASS
 *
 * prismatic  a plate of blocks with bores, the same in every layer
 * organic    blobs whose outline moves by up to 0.8 px with every layer, grey rims
 * lattice    struts of 10 px every 50 px, crossing, on a plate that stays
 *
 * First solid in layer 0, the same bytes every time. Shapes are computed run by run and layers are
 * written in parallel, so that making is not the slow part. libpng chooses the filter of each row,
 * as it does unless told otherwise. */
#include <math.h>
#include <png.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

typedef struct picture {
    int width, height;
    unsigned char *row; /* [width] */
} picture;

static void light(picture *p, double x0, double x1)
{
    const int a = (int)ceil(fmax(x0, 0)), b = (int)floor(fmin(x1, p->width));
    if (b <= a)
        return;
    memset(p->row + a, 255, (size_t)(b - a));
    if (a > 0 && p->row[a - 1] == 0) /* a grey rim by the share that is covered */
        p->row[a - 1] = (unsigned char)(255 * (a - x0));
    if (b < p->width && p->row[b] == 0)
        p->row[b] = (unsigned char)(255 * (x1 - b));
}

static void dark(picture *p, double x0, double x1)
{
    const int a = (int)fmax(x0, 0), b = (int)fmin(x1, p->width);
    if (b > a)
        memset(p->row + a, 0, (size_t)(b - a));
}

/* Blocks of 600 px every 800, a bore of 120 px radius in each. */
static void prismatic(picture *p, int y, int layer)
{
    (void)layer;
    const int in_y = y % 800;
    if (in_y < 100 || in_y >= 700)
        return;
    for (int x = 100; x + 700 <= p->width; x += 800) {
        light(p, x, x + 600);
        const double dy = in_y - 400, half = 120 * 120 - dy * dy;
        if (half > 0)
            dark(p, x + 300 - sqrt(half), x + 300 + sqrt(half));
    }
}

/* Discs of changing radius on a grid of 640 px, a wave on their rim. */
static void organic(picture *p, int y, int layer)
{
    for (int cy = 320; cy + 320 <= p->height; cy += 640) {
        if (abs(y - cy) > 300)
            continue;
        for (int cx = 320; cx + 320 <= p->width; cx += 640) {
            const double r = 220 + 60 * sin(0.008 * layer + cx * 0.01 + cy * 0.02);
            const double dy = y - cy, wave = 6 * sin(0.1 * dy + 0.05 * layer);
            const double half = r * r - dy * dy;
            if (half > 0)
                light(p, cx - sqrt(half) + wave, cx + sqrt(half) + wave);
        }
    }
}

static void lattice(picture *p, int y, int layer)
{
    const int on_level = layer % 50 < 10;
    if (y < 50 || y >= p->height - 50)
        return;
    if (on_level && y % 50 < 10) {
        light(p, 50, p->width - 50);
        return;
    }
    if (!on_level && y % 50 >= 10)
        return;
    for (int x = 50; x + 60 <= p->width; x += 50)
        light(p, x, x + 10);
}

typedef void (*drawing)(picture *, int y, int layer);

static int write_layer(const char *path, picture *p, int layer, drawing draw)
{
    FILE *file = fopen(path, "wb");
    png_structp png = png_create_write_struct(PNG_LIBPNG_VER_STRING, NULL, NULL, NULL);
    png_infop info = png != NULL ? png_create_info_struct(png) : NULL;
    if (file == NULL || info == NULL || setjmp(png_jmpbuf(png)))
        return 1;
    png_init_io(png, file);
    png_set_compression_level(png, 1);
    png_set_IHDR(png, info, (png_uint_32)p->width, (png_uint_32)p->height, 8, PNG_COLOR_TYPE_GRAY,
                 PNG_INTERLACE_NONE, PNG_COMPRESSION_TYPE_DEFAULT, PNG_FILTER_TYPE_DEFAULT);
    png_write_info(png, info);
    for (int y = 0; y < p->height; y++) {
        memset(p->row, 0, (size_t)p->width);
        draw(p, y, layer);
        png_write_row(png, p->row);
    }
    png_write_end(png, info);
    png_destroy_write_struct(&png, &info);
    return fclose(file) != 0;
}

static drawing find_drawing(const char *name)
{
    static const struct {
        const char *name;
        drawing draw;
    } classes[] = {{"prismatic", prismatic}, {"organic", organic}, {"lattice", lattice}};
    for (size_t i = 0; i < sizeof classes / sizeof *classes; i++) {
        if (strcmp(classes[i].name, name) == 0)
            return classes[i].draw;
    }
    return NULL;
}

static int make_layer(const char *folder, int width, int height, int layer, drawing draw)
{
    char path[4096];
    picture p = {width, height, malloc((size_t)width)};
    (void)snprintf(path, sizeof path, "%s/layer_%05d.png", folder, layer);
    const int failed = p.row == NULL || write_layer(path, &p, layer, draw) != 0;
    if (failed)
        (void)fprintf(stderr, "bench_make_stack: could not write %s\n", path);
    free(p.row);
    return failed;
}

int main(int argc, char **argv)
{
    const drawing draw = argc == 6 ? find_drawing(argv[5]) : NULL;
    const int width = draw != NULL ? atoi(argv[2]) : 0, height = draw != NULL ? atoi(argv[3]) : 0;
    if (width < 1 || height < 1) {
        (void)fputs(
            "usage: bench_make_stack FOLDER WIDTH HEIGHT LAYERS prismatic|organic|lattice\n",
            stderr);
        return 2;
    }
    const int layers = atoi(argv[4]);
    int failed = 0;
#pragma omp parallel for schedule(dynamic, 1) reduction(+ : failed)
    for (int layer = 0; layer < layers; layer++)
        failed += make_layer(argv[1], width, height, layer, draw);
    return failed != 0 ? 3 : 0;
}
