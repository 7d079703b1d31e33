/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/* Private to the room: quantities as an operator reads them. */
#ifndef ULLAGE_SCREEN_FORMAT_H
#define ULLAGE_SCREEN_FORMAT_H

#include "ullage/screen.h"

/* The unit in which a quantity of a dimension and this magnitude is shown: kW, g/s, t ...
 * fallback (may be NULL) is used for dimensions that keep their own. */
struct unit shown_unit(const struct unit *own, double magnitude_si);
extern const struct unit format_percent;
/* "5.39" with decimals that u makes meaningful; "--" where it is bad or missing. */
void format_value(char *dst, size_t size, struct quantity q, const struct unit *unit);
/* "5.39 ± 0.13 kW", with the quality's mark behind when it is not good. */
void format_quantity(char *dst, size_t size, struct quantity q, const struct unit *own);
/* The same in the unit of its own, as an instrument tells it. */
void format_reading(char *dst, size_t size, struct quantity q, const struct unit *own);
/* The same without the uncertainty: "5.39 kW". */
void format_plain(char *dst, size_t size, struct quantity q, const struct unit *own);
/* A tag as it is now: a point in its own unit, a derived quantity in the one that suits it. */
void format_tag(char *dst, size_t size, const struct view *view, int tag, bool with_u);
/* " (41 s old)" behind a stale point, else nothing. */
void format_age(char *dst, size_t size, const struct view *view, int tag);
enum style quality_style(enum quality quality);
/* "2026-11-30 23:59:07Z" */
void format_clock(char *dst, size_t size, int64_t utc_ns);

/* A quantity that was good when it was read is stale when the source has stopped. */
struct quantity view_as_of_now(const struct view *view, struct quantity q);
/* How old a reading is now: "41 s"; false, and nothing, for what is no reading or was never
 * read. */
bool view_age(const struct view *view, int tag, char *dst, size_t size);
/* A derived quantity of a thing; of quality missing where the plant has none. */
struct quantity view_quantity(const struct view *view, enum derived_id id, int thing);
/* A tag, SI, in its own basis (points as read); reason may be NULL. */
struct quantity view_tag(const struct view *view, int tag, const char **reason);
/* What a reference says now, in its own basis. */
struct quantity view_ref(const struct view *view, const struct ref *ref);
const char *ref_name(const struct view *view, const struct ref *ref);

#endif
