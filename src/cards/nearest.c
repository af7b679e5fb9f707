#include "cards/nearest.h"

#include <string.h>

enum { LONGEST = 48 }; /* no key is longer */

static size_t least(size_t a, size_t b)
{
    return a < b ? a : b;
}

/* Levenshtein distance, one row of the table at a time. */
static size_t distance(const char *a, size_t a_length, const char *b, size_t b_length)
{
    size_t row[LONGEST + 1];
    for (size_t j = 0; j <= b_length; j++)
        row[j] = j;
    for (size_t i = 1; i <= a_length; i++) {
        size_t diagonal = row[0];
        row[0] = i;
        for (size_t j = 1; j <= b_length; j++) {
            size_t replaced = diagonal + (a[i - 1] != b[j - 1]);
            diagonal = row[j];
            row[j] = least(replaced, least(row[j], row[j - 1]) + 1);
        }
    }
    return row[b_length];
}

size_t fw_nearest(const char *typed, const char *const *word, size_t count)
{
    size_t best = count, fewest = LONGEST, length = strlen(typed);
    if (length > LONGEST)
        return count;
    for (size_t i = 0; i < count; i++) {
        size_t letters = strlen(word[i]), limit = letters / 3 > 2 ? letters / 3 : 2;
        if (letters > LONGEST)
            continue;
        size_t edits = distance(typed, length, word[i], letters);
        if (edits <= limit && edits < letters && edits < fewest) {
            fewest = edits;
            best = i;
        }
    }
    return best;
}
