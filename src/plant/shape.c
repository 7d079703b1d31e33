/* SPDX-License-Identifier: MIT */
/* Copyright the ullage authors */

/*
 * Vessel shapes: volume below a level, the free surface, and the level of a volume. Plane
 * geometry; a strapping table is joined by straight lines.
 */
#include "ullage/plant.h"

#include <math.h>

static const double PI = 3.14159265358979323846;

static double held(double value, double low, double high)
{
    return value < low ? low : value > high ? high : value;
}

double shape_height_m(const struct shape *shape)
{
    switch (shape->kind) {
    case SHAPE_BOX:
    case SHAPE_UPRIGHT_CYLINDER:
        return shape->height_m;
    case SHAPE_LYING_CYLINDER:
    case SHAPE_SPHERE:
        return shape->diameter_m;
    case SHAPE_TABLE:
        return shape->table_height_m[shape->count - 1];
    }
    return 0;
}

double shape_volume_m3(const struct shape *shape)
{
    return shape_volume_at_m3(shape, shape_height_m(shape));
}

/* Index of the stretch of the table that holds a level. */
static int stretch(const struct shape *shape, double level)
{
    int low = 0, high = shape->count - 1;
    while (high - low > 1) {
        int middle = (low + high) / 2;
        if (shape->table_height_m[middle] <= level)
            low = middle;
        else
            high = middle;
    }
    return low;
}

double shape_volume_at_m3(const struct shape *shape, double level_m)
{
    double h = held(level_m, shape->kind == SHAPE_TABLE ? shape->table_height_m[0] : 0,
                    shape_height_m(shape));
    double d = shape->diameter_m, r = 0.5 * d;
    switch (shape->kind) {
    case SHAPE_BOX:
        return shape->length_m * shape->width_m * h;
    case SHAPE_UPRIGHT_CYLINDER:
        return 0.25 * PI * d * d * h;
    case SHAPE_LYING_CYLINDER:
        return shape->length_m * (r * r * acos(held((r - h) / r, -1, 1)) -
                                  (r - h) * sqrt(held(2 * r * h - h * h, 0, r * r)));
    case SHAPE_SPHERE:
        return PI * h * h * (1.5 * d - h) / 3;
    case SHAPE_TABLE: {
        int i = stretch(shape, h);
        double h0 = shape->table_height_m[i], h1 = shape->table_height_m[i + 1];
        double v0 = shape->table_volume_m3[i], v1 = shape->table_volume_m3[i + 1];
        return v0 + (v1 - v0) * (h - h0) / (h1 - h0);
    }
    }
    return 0;
}

double shape_surface_at_m2(const struct shape *shape, double level_m)
{
    double h = held(level_m, 0, shape_height_m(shape)), d = shape->diameter_m;
    switch (shape->kind) {
    case SHAPE_BOX:
        return shape->length_m * shape->width_m;
    case SHAPE_UPRIGHT_CYLINDER:
        return 0.25 * PI * d * d;
    case SHAPE_LYING_CYLINDER:
        return shape->length_m * 2 * sqrt(held(d * h - h * h, 0, 0.25 * d * d));
    case SHAPE_SPHERE:
        return PI * (d * h - h * h);
    case SHAPE_TABLE: {
        int i = stretch(shape, h);
        return (shape->table_volume_m3[i + 1] - shape->table_volume_m3[i]) /
               (shape->table_height_m[i + 1] - shape->table_height_m[i]);
    }
    }
    return 0;
}

double shape_level_at_m(const struct shape *shape, double volume_m3)
{
    double low = shape->kind == SHAPE_TABLE ? shape->table_height_m[0] : 0;
    double high = shape_height_m(shape);
    if (!(volume_m3 > shape_volume_at_m3(shape, low)))
        return low;
    if (!(volume_m3 < shape_volume_at_m3(shape, high)))
        return high;
    /* Volume rises with level: halving needs no derivative and cannot miss. */
    for (int i = 0; i < 60; i++) {
        double middle = 0.5 * (low + high);
        if (shape_volume_at_m3(shape, middle) < volume_m3)
            low = middle;
        else
            high = middle;
    }
    return 0.5 * (low + high);
}
