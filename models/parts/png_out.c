/* One 8-bit grey PNG. */
#include "raster.h"

#include <errno.h>
#include <png.h>
#include <stdio.h>

/* libpng comes back here by longjmp on an error, so nothing below may hold a local that changes. */
static int write_rows(png_structp png, png_infop info, FILE *file, const uint8_t *grey, int width,
                      int height)
{
    if (setjmp(png_jmpbuf(png)))
        return EIO;
    png_init_io(png, file);
    png_set_compression_level(png, 2);
    png_set_filter(png, 0, PNG_FILTER_NONE);
    png_set_IHDR(png, info, (png_uint_32)width, (png_uint_32)height, 8, PNG_COLOR_TYPE_GRAY,
                 PNG_INTERLACE_NONE, PNG_COMPRESSION_TYPE_DEFAULT, PNG_FILTER_TYPE_DEFAULT);
    png_write_info(png, info);
    for (int y = 0; y < height; ++y)
        png_write_row(png, grey + (size_t)y * (size_t)width);
    png_write_end(png, info);
    return 0;
}

static int write_file(FILE *file, const uint8_t *grey, int width, int height)
{
    png_structp png = png_create_write_struct(PNG_LIBPNG_VER_STRING, NULL, NULL, NULL);
    png_infop info = png ? png_create_info_struct(png) : NULL;
    int error = info ? write_rows(png, info, file, grey, width, height) : ENOMEM;
    png_destroy_write_struct(&png, &info);
    return error;
}

int part_write_png(const char *path, const uint8_t *grey, int width, int height)
{
    FILE *file = fopen(path, "wb");
    if (!file)
        return errno;
    int error = write_file(file, grey, width, height);
    if (fclose(file) && !error)
        error = errno;
    return error;
}
