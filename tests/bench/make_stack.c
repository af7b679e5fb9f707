/* Makes a stack of masks for the benchmark: bench_make_stack FOLDER WIDTH HEIGHT LAYERS CLASS
 *
 * prismatic  a plate of blocks with bores, the same in every layer
 * organic    blobs whose outline moves by up to 0.8 px with every layer, grey rims
 * lattice    struts of 10 px every 50 px, crossing, on a plate that stays
 *
 * First solid in layer 0. Shapes are computed run by run, so that making is not the slow part. */
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

static int write_layer(const char *path, picture *p, int layer, void (*draw)(picture *, int, int))
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

int main(int argc, char **argv)
{
    if (argc != 6) {
        fputs("usage: bench_make_stack FOLDER WIDTH HEIGHT LAYERS prismatic|organic|lattice\n",
              stderr);
        return 2;
    }
    const int layers = atoi(argv[4]);
    void (*draw)(picture *, int, int) = strcmp(argv[5], "prismatic") == 0 ? prismatic
                                        : strcmp(argv[5], "organic") == 0 ? organic
                                                                          : lattice;
    picture p = {atoi(argv[2]), atoi(argv[3]), NULL};
    p.row = malloc((size_t)p.width);
    if (p.row == NULL)
        return 3;
    for (int n = 0; n < layers; n++) {
        char path[4096];
        (void)snprintf(path, sizeof path, "%s/layer_%05d.png", argv[1], n);
        if (write_layer(path, &p, n, draw) != 0) {
            fprintf(stderr, "bench_make_stack: could not write %s\n", path);
            return 3;
        }
    }
    free(p.row);
    return 0;
}
