/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * What can go wrong in the simulated plant.
 */
#include "model.h"

#include <string.h>

static const struct upset upsets[UPSET_COUNT] = {
    [UPSET_HALL_RELEASE] = {"hall-release",
                            "150 g/s of cold liquid escapes into the first hall"                 },
    [UPSET_COOLING_LOST] = {"cooling-lost",   "the coolant stops"                                },
    [UPSET_HEAT_STEP] = {"heat-step",      "30 % more heat comes in"                          },
    [UPSET_FAN_FAILED] = {"fan-failed",     "the hall's fan stops"                             },
    [UPSET_SLOW_LEAK] = {"slow-leak",      "3 g/s of liquid escape outside, unmetered"        },
    [UPSET_AIR_INGRESS] = {"air-ingress",    "air finds its way into the liquid"                },
    [UPSET_PURIFIER_SPENT] = {"purifier-spent",
                            "the purifier lets oxygen through, more and more"                    },
    [UPSET_GAUGE_DRIFT] = {"gauge-drift",    "the level gauge drifts by 0.1 % of height an hour"},
    [UPSET_MONITOR_STUCK] = {"monitor-stuck",  "an oxygen monitor keeps its last reading"         },
    [UPSET_LINK_LOST] = {"link-lost",      "the device of the hall's monitors stops answering"},
    [UPSET_BAD_DELIVERY] = {"bad-delivery",   "the delivery at the dock holds 2.5 ppm of oxygen" },
};

const struct upset *upset_list(size_t *count)
{
    *count = UPSET_COUNT;
    return upsets;
}

const struct upset *upset_find(const char *name)
{
    for (size_t i = 0; i < UPSET_COUNT; i++)
        if (strcmp(upsets[i].name, name) == 0)
            return &upsets[i];
    return NULL;
}

enum upset_id upset_id(const struct upset *upset)
{
    return (enum upset_id)(upset - upsets);
}

bool upset_active(const struct simulator *simulator, enum upset_id id)
{
    return simulator->upset == &upsets[id] && simulator->time_s >= simulator->upset_start_s;
}

double upset_age_s(const struct simulator *simulator)
{
    double age = simulator->time_s - simulator->upset_start_s;
    return simulator->upset != NULL && age > 0 ? age : 0;
}
