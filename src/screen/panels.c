/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The panels in their order, and the keys that mean the same everywhere.
 */
#include "panel.h"

const struct panel *const panels[] = {
    &panel_ledgers, &panel_hall,    &panel_alarms, &panel_links,
    &panel_points,  &panel_banners, &panel_help,   &panel_why,
};

int panel_count(void)
{
    return (int)ARRAY_LENGTH(panels);
}

const struct key_help key_helps[] = {
    {"up down",            "choose a row, or scroll",                              NULL    },
    {"PgUp PgDn Home End", "a page up or down, to the first, to the last",         NULL    },
    {"Tab",                "the next panel",                                       NULL    },
    {"a",                  "acknowledge the chosen alarm (alarms panel)",          NULL    },
    {"A",                  "acknowledge all of priority 2 to 4 (alarms panel)",    NULL    },
    {"w",                  "why: where the chosen number comes from; again: back", "w why" },
    {"Escape",             "back to the panel before",                             NULL    },
    {"Ctrl-L",             "draw the whole screen again",                          NULL    },
    {"q",                  "quit; the plant goes on",                              "q quit"},
};

int key_help_count(void)
{
    return (int)ARRAY_LENGTH(key_helps);
}
