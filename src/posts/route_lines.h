/* Straight lines through free space: room, border of the image, other posts. Inner part of the
 * router. */
#ifndef FW_ROUTE_LINES_H
#define FW_ROUTE_LINES_H

#include "posts/route_window.h"

/* Takes the cells out of a window that other posts need. */
void fw_route_block_posts(fw_route_window *w, const fw_route_query *q);

/* True when a post may run straight from p down to r: lean, room, border, other posts. */
bool fw_route_line_passes(const fw_route_query *q, const fw_point *p, const fw_point *r);

#endif
