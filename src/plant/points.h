/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/* Private to the room: the parts of resolving a plant that have files of their own. */
#ifndef ULLAGE_PLANT_POINTS_H
#define ULLAGE_PLANT_POINTS_H

#include "reader.h"

/* Drafts of points to plant->point. */
int points_finish(struct assembly *assembly);
/* plant->derived and the index of all tags by name; after things and points. */
int tags_build(struct assembly *assembly);
/* Drafts of alarms to plant->alarm; after the tags. */
int alarms_finish(struct assembly *assembly);

#endif
