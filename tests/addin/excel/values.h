/* The host's value type, declared here from the vendor's public interface documentation and from nothing else, and the
 * text form in which the test hands values over. */

#ifndef VALUES_H
#define VALUES_H

#include <stddef.h>
#include <stdint.h>

typedef uint16_t unit;

struct value {
    union {
        double num;
        unit *str; /* a count, then as many units */
        int32_t xbool;
        int32_t err;
        int32_t w;
        struct {
            uint16_t count;
            struct {
                int32_t row_first, row_last, column_first, column_last;
            } area;
        } sref;
        struct {
            void *areas;
            uintptr_t sheet;
        } mref;
        struct {
            struct value *cells;
            int32_t rows, columns;
        } array;
        struct {
            union {
                int32_t level, toolbar;
                uintptr_t sheet;
            } where;
            int32_t row, column;
            uint8_t what;
        } flow;
        struct {
            union {
                uint8_t *bytes;
                void *handle;
            } data;
            long length;
        } big;
    } val;
    uint32_t xltype;
};

_Static_assert(sizeof(struct value) == 32, "a value has 32 bytes");
_Static_assert(offsetof(struct value, xltype) == 24, "the type stands last");

enum {
    TYPE_NUM = 0x0001,
    TYPE_STR = 0x0002,
    TYPE_BOOL = 0x0004,
    TYPE_REF = 0x0008,
    TYPE_ERR = 0x0010,
    TYPE_FLOW = 0x0020,
    TYPE_MULTI = 0x0040,
    TYPE_MISSING = 0x0080,
    TYPE_NIL = 0x0100,
    TYPE_SREF = 0x0400,
    TYPE_INT = 0x0800,
    TYPE_BIG = TYPE_STR | TYPE_INT,
    BIT_XL_FREE = 0x1000,
    BIT_DLL_FREE = 0x4000,
};

/* Memory for the arguments of one case, in one piece, so that a change to any of it shows. */
struct arena {
    char *base;
    size_t used, size;
};

/* Reads one value in text form and moves the text on; the program ends where the form is not understood.
 *
 *   n:<16 hex digits>      number, by its bits        m   left out
 *   s:<4 hex digits>...    text, by its UTF-16 units  z   blank
 *   s*<count>:<4 digits>   one unit, repeated         b:<0 or 1>
 *   i:<decimal>            integer                    e:<decimal>
 *   a:<rows>x<columns>     array, its cells follow
 *   ref sref flow big      a value of that type       nowhere   a text without memory
 */
struct value read_value(char **text, struct arena *arena);

/* Memory from the arena, aligned for any value. */
void *take(struct arena *arena, size_t bytes);

/* Whether two values are the same bit for bit, `bits` being what the type of the first must hold beside its kind. */
int same(const struct value *got, const struct value *expected, uint32_t bits);

/* Prints a value in text form, long arrays cut. */
void show(const struct value *value);

#endif
