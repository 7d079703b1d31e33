/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The frame: every point's sample at one time, and the words for why a sample is not good.
 */
#include "ullage/field.h"

#define X(id, says) [CAUSE_##id] = says,
static const char *const cause_words[] = {CAUSE_LIST(X)};
#undef X
_Static_assert(ARRAY_LENGTH(cause_words) == CAUSE_COUNT, "each cause has its words");

const char *cause_says(enum cause cause)
{
    return cause < CAUSE_COUNT ? cause_words[cause] : "unknown cause";
}

int frame_init(struct frame *frame, const struct plant *plant, struct arena *arena)
{
    struct sample *sample = arena_take(arena, (size_t)plant->point_count, sizeof(*sample));
    if (sample == NULL)
        return ERR_MEMORY;
    for (int i = 0; i < plant->point_count; i++)
        sample[i] = (struct sample){.quality = QUALITY_MISSING, .cause = CAUSE_NEVER_READ};
    *frame = (struct frame){.count = plant->point_count, .sample = sample};
    return 0;
}

double frame_age_s(const struct frame *frame, int point)
{
    int64_t read = frame->sample[point].read_utc_ns;
    if (read == 0 || read > frame->utc_ns)
        return 0;
    return time_ns_to_s(frame->utc_ns - read);
}
