/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Sentences about what went wrong. One line each: text from outside is made printable here, so
 * that no caller can forget it.
 */
#include "ullage/base.h"

#include <stdio.h>
#include <string.h>

int error_set(struct error *err, int code, const char *fmt, ...)
{
    if (err == NULL)
        return code;
    char text[sizeof(err->text)];
    va_list args;
    va_start(args, fmt);
    vsnprintf(text, sizeof(text), fmt, args);
    va_end(args);
    err->code = code;
    text_printable(err->text, sizeof(err->text), text);
    return code;
}

int error_context(struct error *err, const char *fmt, ...)
{
    if (err == NULL)
        return ERR_ARGUMENT;
    char context[160], whole[sizeof(context) + sizeof(err->text) + 2];
    va_list args;
    va_start(args, fmt);
    vsnprintf(context, sizeof(context), fmt, args);
    va_end(args);
    snprintf(whole, sizeof(whole), "%s: %s", context, err->text);
    text_printable(err->text, sizeof(err->text), whole);
    return err->code;
}
