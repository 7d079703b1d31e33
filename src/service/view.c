/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * The words of a view.
 */
#include "ullage/service.h"

const char *view_mode_word(enum view_mode mode)
{
    switch (mode) {
    case VIEW_LIVE:
        return "LIVE";
    case VIEW_DEMO:
        return "SIMULATED";
    case VIEW_REPLAY:
        return "REPLAY";
    }
    return "";
}
