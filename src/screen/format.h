/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/* Private to the room: quantities as an operator reads them. */
#ifndef ULLAGE_SCREEN_FORMAT_H
#define ULLAGE_SCREEN_FORMAT_H

#include "ullage/screen.h"

/* The unit in which a quantity of a dimension and this magnitude is shown: kW, g/s, t ...
 * fallback (may be NULL) is used for dimensions that keep their own. */
struct unit shown_unit(const struct unit *own, double magnitude_si);
/* "5.39" with decimals that u makes meaningful; "--" where it cannot be used. */
void format_value(char *dst, size_t size, struct quantity q, const struct unit *unit);
/* "5.39 ± 0.13 kW", with the quality's mark behind when it is not good; "--" if not usable. */
void format_quantity(char *dst, size_t size, struct quantity q, const struct unit *own);
/* The same in the unit of its own, as an instrument tells it. */
void format_reading(char *dst, size_t size, struct quantity q, const struct unit *own);
/* The same without the uncertainty: "5.39 kW". */
void format_plain(char *dst, size_t size, struct quantity q, const struct unit *own);
enum style quality_style(enum quality quality);
/* "2026-11-30 23:59:07Z" */
void format_clock(char *dst, size_t size, int64_t utc_ns);

/* A derived quantity of a thing as it is now; of quality missing where the plant has none. */
const struct derived_value *view_derived(const struct view *view, enum derived_id id,
                                         int thing);
struct quantity view_quantity(const struct view *view, enum derived_id id, int thing);
/* A tag, SI, in its own basis (points as read); reason may be NULL. */
struct quantity view_tag(const struct view *view, int tag, const char **reason);
/* What a reference says now, in its own basis. */
struct quantity view_ref(const struct view *view, const struct ref *ref);
const char *ref_name(const struct view *view, const struct ref *ref);

#endif
