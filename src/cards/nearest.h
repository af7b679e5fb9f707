/* "did you mean": the known word that a mistyped one stands nearest to. */
#ifndef FW_CARDS_NEAREST_H
#define FW_CARDS_NEAREST_H

#include <stddef.h>

/* Index of the word with the fewest single-letter edits to `typed` (Levenshtein 1966), the earliest
 * among equals; count where even that one is further than a third of its letters (or 2). */
size_t fw_nearest(const char *typed, const char *const *word, size_t count);

#endif
