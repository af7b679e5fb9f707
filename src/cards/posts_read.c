/* Contents: refuse; numbers by key; one post; the whole file. */
#include "cards/posts_read.h"

#include "cards/nearest.h"
#include "cards/text_read.h"
#include "fault/memory.h"

#include <inttypes.h>
#include <jansson.h>
#include <math.h>
#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

/* A post of the usual 4 points holds some 400 bytes and 35 values. jansson takes up to 130 bytes a
 * value, so MOST_VALUES keeps any file, however hostile, to 260 MB of tree. */
enum {
    FILE_LIMIT = 32 << 20,
    MOST_VALUES = 2000000,
    MOST_POSTS = 50000,
    MOST_LAYERS = 1000000,
    PLACE = 64
};

#define MOST_MM 1e4           /* no plate is larger */
#define SAME_HEIGHT_MM 0.0005 /* half of what the file resolves */

/* Where in the file a value stands: "posts.json: posts[3]". */
typedef struct place {
    const char *file;
    char path[PLACE]; /* "" at the top, else "posts[3]" */
    fw_fault *fault;
} place;

/* --- refuse --- */

__attribute__((format(printf, 3, 4))) static fw_status refuse(const place *at, const char *key,
                                                              const char *format, ...)
{
    char text[FW_FAULT_TEXT];
    va_list values;
    va_start(values, format);
    vsnprintf(text, sizeof text, format, values);
    va_end(values);
    const char *dot = at->path[0] != '\0' && key[0] != '\0' ? "." : "";
    return fw_fault_set(at->fault, FW_INPUT, "%s: %s%s%.60s: %s", at->file, at->path, dot, key,
                        text);
}

/* Every key must be there and no other. */
static fw_status check_keys(const place *at, json_t *object, const char *const *key, size_t count)
{
    for (size_t i = 0; i < count; i++) {
        if (json_object_get(object, key[i]) == NULL)
            return refuse(at, key[i], "missing; add it");
    }
    const char *given;
    json_t *value;
    json_object_foreach(object, given, value)
    {
        size_t i = 0;
        while (i < count && strcmp(key[i], given) != 0)
            i++;
        if (i < count)
            continue;
        size_t best = fw_nearest(given, key, count);
        return refuse(at, given, "no key of this format; leave it out%s%s",
                      best < count ? ", or did you mean " : "", best < count ? key[best] : "");
    }
    return FW_OK;
}

/* --- numbers by key --- */

static fw_status check_number(const place *at, const char *key, const json_t *value, double low,
                              double high, double *out)
{
    if (!json_is_number(value))
        return refuse(at, key, "is no number; give one from %g to %g", low, high);
    double number = json_number_value(value);
    if (!(number >= low && number <= high))
        return refuse(at, key, "%g is out of range; give a number from %g to %g", number, low,
                      high);
    *out = number;
    return FW_OK;
}

static fw_status get_number(const place *at, json_t *object, const char *key, double low,
                            double high, double *out)
{
    return check_number(at, key, json_object_get(object, key), low, high, out);
}

/* A number or null. */
static fw_status check_result(const place *at, json_t *object, const char *key)
{
    double number;
    if (json_is_null(json_object_get(object, key)))
        return FW_OK;
    return get_number(at, object, key, 0, HUGE_VAL, &number);
}

static fw_status get_whole(const place *at, json_t *object, const char *key, int32_t low,
                           int32_t high, int32_t *out)
{
    const json_t *value = json_object_get(object, key);
    if (!json_is_integer(value))
        return refuse(at, key, "is no whole number; give one from %" PRId32 " to %" PRId32, low,
                      high);
    json_int_t number = json_integer_value(value);
    if (number < low || number > high)
        return refuse(at, key,
                      "%" JSON_INTEGER_FORMAT " is out of range; give one from %" PRId32
                      " to %" PRId32,
                      number, low, high);
    *out = (int32_t)number;
    return FW_OK;
}

static fw_status get_flag(const place *at, json_t *object, const char *key, bool *out)
{
    const json_t *value = json_object_get(object, key);
    if (!json_is_boolean(value))
        return refuse(at, key, "give true or false");
    *out = json_is_true(value);
    return FW_OK;
}

static fw_status expect_text(const place *at, json_t *object, const char *key, const char *wanted)
{
    const json_t *value = json_object_get(object, key);
    if (!json_is_string(value) || strcmp(json_string_value(value), wanted) != 0)
        return refuse(at, key, "expects \"%s\"", wanted);
    return FW_OK;
}

/* --- one post --- */

static fw_status read_point(const place *at, const char *key, const json_t *value, fw_point *out)
{
    if (!json_is_array(value) || json_array_size(value) != 3)
        return refuse(at, key, "a point is three numbers in brackets, [x, y, z]");
    FW_TRY(check_number(at, key, json_array_get(value, 0), -MOST_MM, MOST_MM, &out->x));
    FW_TRY(check_number(at, key, json_array_get(value, 1), -MOST_MM, MOST_MM, &out->y));
    return check_number(at, key, json_array_get(value, 2), 0, MOST_MM, &out->z);
}

/* A path runs from the tip down to the plate; one that is not routed may be its tip alone. */
static fw_status check_path(const place *at, const fw_post *post)
{
    for (int32_t i = 1; i < post->point_count; i++) {
        if (post->path[i].z >= post->path[i - 1].z)
            return refuse(at, "path_mm",
                          "point %d is not nearer to the plate than the one before; list them from "
                          "tip to foot",
                          i);
    }
    if (post->routed && post->path[post->point_count - 1].z > SAME_HEIGHT_MM)
        return refuse(at, "path_mm", "ends at z %g mm, but a routed post ends on the plate, z 0",
                      post->path[post->point_count - 1].z);
    return FW_OK;
}

static fw_status read_path(const place *at, json_t *object, fw_post *post)
{
    const json_t *path = json_object_get(object, "path_mm");
    size_t least = post->routed ? 2 : 1, count = json_array_size(path); /* 0 where it is no array */
    if (count < least || count > FW_POST_POINTS)
        return refuse(at, "path_mm", "expects a list of %zu to %d points", least, FW_POST_POINTS);
    for (size_t i = 0; i < count; i++) {
        char key[PLACE];
        snprintf(key, sizeof key, "path_mm[%zu]", i);
        FW_TRY(read_point(at, key, json_array_get(path, i), &post->path[i]));
    }
    post->point_count = (int32_t)count;
    return check_path(at, post);
}

static fw_status read_layers(const place *at, json_t *object, int32_t lift_layers, fw_post *post)
{
    int32_t raw = 0;
    FW_TRY(get_whole(at, object, "tip_layer", 0, MOST_LAYERS, &post->tip_layer));
    FW_TRY(get_whole(at, object, "raw_tip_layer", 0, MOST_LAYERS, &raw));
    if (raw + lift_layers != post->tip_layer)
        return refuse(at, "raw_tip_layer",
                      "%" PRId32 " and lift_layers %" PRId32 " do not make tip_layer %" PRId32
                      "; correct one of them",
                      raw, lift_layers, post->tip_layer);
    return get_whole(at, object, "bite_layers", 0, MOST_LAYERS, &post->bite_layers);
}

static fw_status read_sizes(const place *at, json_t *object, fw_post *post)
{
    const double least = 0.001; /* what the file resolves */
    FW_TRY(get_number(at, object, "tip_mm", least, MOST_MM, &post->tip_mm));
    FW_TRY(get_number(at, object, "neck_mm", 0, MOST_MM, &post->neck_mm));
    FW_TRY(get_number(at, object, "shaft_mm", least, MOST_MM, &post->shaft_mm));
    return get_number(at, object, "foot_mm", least, MOST_MM, &post->foot_mm);
}

static fw_status check_results(const place *at, json_t *object)
{
    int32_t layer = 0;
    FW_TRY(check_result(at, object, "load_N"));
    FW_TRY(get_whole(at, object, "load_layer", -1, MOST_LAYERS, &layer));
    FW_TRY(check_result(at, object, "contact_mm2"));
    FW_TRY(check_result(at, object, "margin"));
    const char *governs = json_string_value(json_object_get(object, "governs"));
    for (int check = FW_CHECK_NONE; check <= FW_CHECK_BUCKLING; check++) {
        if (governs != NULL && strcmp(governs, fw_check_name((fw_check)check)) == 0)
            return FW_OK;
    }
    return refuse(at, "governs", "expects none, tip, neck, shaft, foot or buckling");
}

/* Ids only rise through the file, so that none stands twice; the post's own is its position. */
static fw_status read_id(const place *at, json_t *object, int32_t *last)
{
    int32_t id = 0;
    FW_TRY(get_whole(at, object, "id", 0, INT32_MAX, &id));
    if (id <= *last)
        return refuse(at, "id",
                      "%" PRId32 " follows %" PRId32 "; ids must rise, give it a larger one", id,
                      *last);
    *last = id;
    return FW_OK;
}

static fw_status read_post(const place *at, json_t *object, int32_t lift_layers, int32_t *last_id,
                           fw_post *post)
{
    static const char *const keys[] = {
        "id",      "locked",  "routed",     "tip_layer",  "raw_tip_layer", "bite_layers",
        "path_mm", "tip_mm",  "neck_mm",    "shaft_mm",   "foot_mm",       "load_N",
        "margin",  "governs", "load_layer", "contact_mm2"};
    if (!json_is_object(object))
        return refuse(at, "", "is no object; a post is { ... }");
    FW_TRY(check_keys(at, object, keys, sizeof keys / sizeof *keys));
    FW_TRY(read_id(at, object, last_id));
    FW_TRY(get_flag(at, object, "locked", &post->locked));
    FW_TRY(get_flag(at, object, "routed", &post->routed));
    FW_TRY(read_layers(at, object, lift_layers, post));
    FW_TRY(read_path(at, object, post));
    FW_TRY(read_sizes(at, object, post));
    return check_results(at, object);
}

/* --- the whole file --- */

static fw_status read_posts(place *at, json_t *root, int32_t lift_layers, fw_posts *out)
{
    const json_t *list = json_object_get(root, "posts");
    size_t count = json_array_size(list);
    if (!json_is_array(list) || count > MOST_POSTS)
        return refuse(at, "posts", "expects a list of at most %d posts", MOST_POSTS);
    FW_TRY(
        fw_grow((void **)&out->item, &out->capacity, count, sizeof *out->item, "posts", at->fault));
    int32_t last_id = -1;
    for (size_t i = 0; i < count; i++) {
        snprintf(at->path, sizeof at->path, "posts[%zu]", i);
        out->item[i] = (fw_post){.id = (int32_t)i};
        FW_TRY(read_post(at, json_array_get(list, i), lift_layers, &last_id, &out->item[i]));
    }
    out->count = count;
    return FW_OK;
}

static fw_status read_digest(const place *at, json_t *root, char out[FW_DIGEST_HEX])
{
    const char *text = json_string_value(json_object_get(root, "raw_sha256"));
    size_t length = text == NULL ? 1 : strlen(text);
    if ((length != 0 && length != FW_DIGEST_HEX - 1) ||
        (text != NULL && strspn(text, "0123456789abcdef") != length))
        return refuse(at, "raw_sha256", "expects 64 digits 0-9 a-f, or \"\"");
    memcpy(out, text, length + 1);
    return FW_OK;
}

static fw_status check_units(place *at, json_t *root)
{
    static const char *const keys[] = {"length", "area", "load"};
    json_t *units = json_object_get(root, "units");
    if (!json_is_object(units))
        return refuse(at, "units", "is no object; copy it from a file that this program wrote");
    snprintf(at->path, sizeof at->path, "units");
    FW_TRY(check_keys(at, units, keys, sizeof keys / sizeof *keys));
    FW_TRY(expect_text(at, units, "length", "mm"));
    FW_TRY(expect_text(at, units, "area", "mm2"));
    FW_TRY(expect_text(at, units, "load", "N"));
    at->path[0] = '\0';
    return FW_OK;
}

static fw_status read_root(place *at, json_t *root, fw_posts *out, char raw_sha256[FW_DIGEST_HEX],
                           int32_t *lift_layers)
{
    static const char *const keys[] = {"format", "units", "raw_sha256", "lift_layers", "posts"};
    if (!json_is_object(root))
        return fw_fault_set(at->fault, FW_INPUT, "%s: no posts file: it begins with no object",
                            at->file);
    FW_TRY(check_keys(at, root, keys, sizeof keys / sizeof *keys));
    FW_TRY(expect_text(at, root, "format", "falsework-posts/1"));
    FW_TRY(check_units(at, root));
    FW_TRY(read_digest(at, root, raw_sha256));
    FW_TRY(get_whole(at, root, "lift_layers", 0, MOST_LAYERS, lift_layers));
    return read_posts(at, root, *lift_layers, out);
}

/* No fewer than the values in a text of JSON, short of one: each but the first follows a mark. */
static size_t count_values(const char *text, size_t size)
{
    size_t count = 0;
    for (size_t i = 0; i < size; i++)
        count += text[i] == ',' || text[i] == '[' || text[i] == '{';
    return count;
}

/* Parses the text; JSON allows neither NAN nor infinity, and jansson refuses numbers that overflow,
 * repeated keys, broken UTF-8 and deep nesting with their line. */
static fw_status parse(const char *path, json_t **root, fw_fault *fault)
{
    char *text;
    size_t size;
    FW_TRY(fw_text_read(path, FILE_LIMIT, &text, &size, fault));
    if (count_values(text, size) > MOST_VALUES) {
        free(text);
        return fw_fault_set(fault, FW_INPUT,
                            "%s: more values than any posts file holds; is it one?", path);
    }
    json_error_t error;
    *root = json_loadb(text, size, JSON_REJECT_DUPLICATES, &error);
    free(text);
    if (*root == NULL && error.text[0] == '\0') /* jansson has a text for all but failed memory */
        return fw_fault_memory(fault, "posts");
    if (*root == NULL)
        return fw_fault_set(fault, FW_INPUT, "%s:%d: no valid JSON (%s); correct it there", path,
                            error.line, error.text);
    return FW_OK;
}

fw_status fw_posts_read(const char *path, fw_posts *out, char raw_sha256[FW_DIGEST_HEX],
                        int32_t *lift_layers, fw_fault *fault)
{
    *out = (fw_posts){0};
    raw_sha256[0] = '\0';
    *lift_layers = 0;
    json_t *root = NULL;
    FW_TRY(parse(path, &root, fault));
    place at = {.file = path, .fault = fault};
    fw_status status = read_root(&at, root, out, raw_sha256, lift_layers);
    json_decref(root);
    if (status != FW_OK) {
        free(out->item);
        *out = (fw_posts){0};
    }
    return status;
}
