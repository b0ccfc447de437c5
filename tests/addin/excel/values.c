/* Reading, comparing and showing values: see values.h. */

#include "values.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>

static void not_understood(const char *what)
{
    printf("host: this case is not understood: %.60s\n", what);
    exit(2);
}

void *take(struct arena *arena, size_t bytes)
{
    size_t start = (arena->used + 15) / 16 * 16;
    if (start + bytes > arena->size) {
        printf("host: the cases need more memory than was set aside\n");
        exit(2);
    }
    arena->used = start + bytes;
    return arena->base + start;
}

static int starts(char **text, const char *word)
{
    size_t length = strlen(word);
    if (strncmp(*text, word, length) != 0)
        return 0;
    *text += length;
    return 1;
}

static uint64_t hexadecimal(char **text, int digits)
{
    char copy[17] = {0};
    char *end;
    memcpy(copy, *text, strnlen(*text, (size_t)digits));
    uint64_t number = strtoull(copy, &end, 16);
    if (end != copy + digits)
        not_understood(*text);
    *text += digits;
    return number;
}

static int32_t decimal(char **text)
{
    char *end;
    long number = strtol(*text, &end, 10);
    if (end == *text)
        not_understood(*text);
    *text = end;
    return (int32_t)number;
}

/* A counted text; units behind the count that are not part of it follow, to show whoever reads too far. */
static unit *counted(struct arena *arena, size_t count)
{
    unit *text = take(arena, (count + 3) * sizeof(unit));
    text[0] = (unit)count;
    text[count + 1] = 0x2620;
    text[count + 2] = 0x2620;
    return text;
}

struct value read_value(char **text, struct arena *arena)
{
    struct value value;
    memset(&value, 0, sizeof value);
    while (**text == ' ')
        ++*text;
    if (starts(text, "n:")) {
        uint64_t bits = hexadecimal(text, 16);
        value.xltype = TYPE_NUM;
        memcpy(&value.val.num, &bits, sizeof bits);
    } else if (starts(text, "s:")) {
        size_t count = strspn(*text, "0123456789abcdef") / 4;
        value.xltype = TYPE_STR;
        value.val.str = counted(arena, count);
        for (size_t i = 1; i <= count; ++i)
            value.val.str[i] = (unit)hexadecimal(text, 4);
    } else if (starts(text, "s*")) {
        size_t count = (size_t)decimal(text);
        if (!starts(text, ":"))
            not_understood(*text);
        unit repeated = (unit)hexadecimal(text, 4);
        value.xltype = TYPE_STR;
        value.val.str = counted(arena, count);
        for (size_t i = 1; i <= count; ++i)
            value.val.str[i] = repeated;
    } else if (starts(text, "a:")) {
        int32_t rows = decimal(text);
        if (!starts(text, "x"))
            not_understood(*text);
        int32_t columns = decimal(text);
        size_t count = (size_t)rows * (size_t)columns;
        value.xltype = TYPE_MULTI;
        value.val.array.rows = rows;
        value.val.array.columns = columns;
        value.val.array.cells = take(arena, count * sizeof(struct value));
        for (size_t i = 0; i < count; ++i)
            value.val.array.cells[i] = read_value(text, arena);
    } else if (starts(text, "b:")) {
        value.xltype = TYPE_BOOL;
        value.val.xbool = decimal(text);
    } else if (starts(text, "e:")) {
        value.xltype = TYPE_ERR;
        value.val.err = decimal(text);
    } else if (starts(text, "i:")) {
        value.xltype = TYPE_INT;
        value.val.w = decimal(text);
    } else if (starts(text, "nowhere")) {
        value.xltype = TYPE_STR;
    } else if (starts(text, "sref")) {
        value.xltype = TYPE_SREF;
        value.val.sref.count = 1;
    } else if (starts(text, "ref")) {
        value.xltype = TYPE_REF;
    } else if (starts(text, "flow")) {
        value.xltype = TYPE_FLOW;
    } else if (starts(text, "big")) {
        value.xltype = TYPE_BIG;
    } else if (starts(text, "m")) {
        value.xltype = TYPE_MISSING;
    } else if (starts(text, "z")) {
        value.xltype = TYPE_NIL;
    } else {
        not_understood(*text);
    }
    return value;
}

int same(const struct value *got, const struct value *expected, uint32_t bits)
{
    if (got->xltype != (expected->xltype | bits))
        return 0;
    switch (expected->xltype) {
    case TYPE_NUM:
        return memcmp(&got->val.num, &expected->val.num, sizeof(double)) == 0;
    case TYPE_STR:
        return got->val.str != NULL && got->val.str[0] == expected->val.str[0] &&
               memcmp(got->val.str, expected->val.str, (1 + (size_t)got->val.str[0]) * sizeof(unit)) == 0;
    case TYPE_BOOL:
        return got->val.xbool == expected->val.xbool;
    case TYPE_ERR:
        return got->val.err == expected->val.err;
    case TYPE_INT:
        return got->val.w == expected->val.w;
    case TYPE_MULTI: {
        int32_t rows = expected->val.array.rows, columns = expected->val.array.columns;
        if (got->val.array.rows != rows || got->val.array.columns != columns || got->val.array.cells == NULL)
            return 0;
        for (int64_t i = 0; i < (int64_t)rows * columns; ++i)
            if (!same(&got->val.array.cells[i], &expected->val.array.cells[i], 0))
                return 0;
        return 1;
    }
    default:
        return 0;
    }
}

void show(const struct value *value)
{
    uint32_t kind = value->xltype & 0x0fff;
    if (value->xltype != kind)
        printf("[type %x] ", value->xltype);
    if (kind == TYPE_NUM) {
        printf("%.17g", value->val.num);
    } else if (kind == TYPE_STR) {
        printf("\"");
        for (int i = 1; value->val.str != NULL && i <= value->val.str[0] && i <= 300; ++i)
            printf(value->val.str[i] < 127 ? "%c" : "\\u%04x", value->val.str[i]);
        printf("\"");
    } else if (kind == TYPE_ERR) {
        printf("error %d", value->val.err);
    } else if (kind == TYPE_BOOL || kind == TYPE_INT) {
        printf("%d", value->val.w);
    } else if (kind == TYPE_MULTI) {
        int64_t count = (int64_t)value->val.array.rows * value->val.array.columns;
        printf("%dx%d:", value->val.array.rows, value->val.array.columns);
        for (int64_t i = 0; i < count && i < 8; ++i) {
            printf(" ");
            show(&value->val.array.cells[i]);
        }
    } else {
        printf("[type %x]", value->xltype);
    }
}
