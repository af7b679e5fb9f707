/* The floor that falsework is held against: bench_floor THREADS decode|recode FILE...
 * decode: every PNG is decoded with libpng, row by row, and thrown away.
 * recode: likewise, and encoded again at level 1 without filter, and thrown away. */
#include <omp.h>
#include <png.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static void throw_away(png_structp png, png_bytep bytes, size_t count)
{
    (void)png;
    (void)bytes;
    (void)count;
}

static void no_flush(png_structp png)
{
    (void)png;
}

static int encode(unsigned char **rows, png_uint_32 width, png_uint_32 height, int depth,
                  int colour)
{
    png_structp png = png_create_write_struct(PNG_LIBPNG_VER_STRING, NULL, NULL, NULL);
    png_infop info = png != NULL ? png_create_info_struct(png) : NULL;
    if (info == NULL || setjmp(png_jmpbuf(png)))
        return 1;
    png_set_write_fn(png, NULL, throw_away, no_flush);
    png_set_compression_level(png, 1);
    png_set_filter(png, 0, PNG_FILTER_NONE);
    png_set_IHDR(png, info, width, height, depth, colour, PNG_INTERLACE_NONE,
                 PNG_COMPRESSION_TYPE_DEFAULT, PNG_FILTER_TYPE_DEFAULT);
    png_write_info(png, info);
    png_write_rows(png, rows, height);
    png_write_end(png, info);
    png_destroy_write_struct(&png, &info);
    return 0;
}

static int take(const char *path, int recode)
{
    FILE *file = fopen(path, "rb");
    png_structp png = png_create_read_struct(PNG_LIBPNG_VER_STRING, NULL, NULL, NULL);
    png_infop info = png != NULL ? png_create_info_struct(png) : NULL;
    if (file == NULL || info == NULL || setjmp(png_jmpbuf(png)))
        return 1;
    png_init_io(png, file);
    png_read_info(png, info);
    const png_uint_32 width = png_get_image_width(png, info);
    const png_uint_32 height = png_get_image_height(png, info);
    const size_t bytes = png_get_rowbytes(png, info);
    unsigned char *data = malloc(bytes * (recode ? height : 1));
    unsigned char **rows = malloc(height * sizeof *rows);
    if (data == NULL || rows == NULL)
        return 1;
    for (png_uint_32 y = 0; y < height; y++) {
        rows[y] = recode ? data + y * bytes : data;
        png_read_row(png, rows[y], NULL);
    }
    const int depth = png_get_bit_depth(png, info), colour = png_get_color_type(png, info);
    png_destroy_read_struct(&png, &info, NULL);
    const int failed = recode && encode(rows, width, height, depth, colour);
    free(rows);
    free(data);
    fclose(file);
    return failed;
}

int main(int argc, char **argv)
{
    if (argc < 4)
        return 2;
    omp_set_num_threads(atoi(argv[1]));
    const int recode = strcmp(argv[2], "recode") == 0;
    int failed = 0;
#pragma omp parallel for schedule(dynamic, 1) reduction(+ : failed)
    for (int i = 3; i < argc; i++) {
        if (take(argv[i], recode) != 0) {
            (void)fprintf(stderr, "bench_floor: could not take %s\n", argv[i]);
            failed++;
        }
    }
    return failed != 0;
}
