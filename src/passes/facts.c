#include "passes/facts.h"

#include "stack/png_read.h"

static fw_status look(const fw_stack *stack, int32_t layer, fw_bytes *bytes, fw_greys *greys,
                      fw_png_format *format, fw_fault *fault)
{
    FW_TRY(fw_stack_read(stack, layer, bytes, fault));
    return fw_png_decode(bytes->data, bytes->size, fw_stack_name(stack, layer), greys, format,
                         fault);
}

fw_status fw_facts_find(const fw_stack *stack, fw_begin_facts *out, fw_fault *fault)
{
    fw_bytes bytes = {0};
    fw_greys greys = {0};
    fw_png_format format = {0};
    fw_status status = FW_OK;
    *out = (fw_begin_facts){.layers = fw_stack_count(stack), .first_solid_layer = -1};
    for (int32_t n = 0; n < out->layers && out->first_solid_layer < 0 && status == FW_OK; n++) {
        status = look(stack, n, &bytes, &greys, &format, fault);
        out->width_px = greys.width;
        out->height_px = greys.height;
        out->depth_bits = format.depth;
        if (greys.count > 0)
            out->first_solid_layer = n;
    }
    fw_bytes_free(&bytes);
    fw_greys_free(&greys);
    fw_png_format_free(&format);
    return status;
}
