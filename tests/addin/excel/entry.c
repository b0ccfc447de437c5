/* The entry that an add-in calls: see entry.h. */

#include "entry.h"

#include <stdlib.h>
#include <string.h>

/* The numbers of the host's functions and of their outcomes, from the public documentation. */
enum {
    XL_FREE = 0x4000,
    XL_GET_NAME = 0x4009,
    XLF_SET_NAME = 88,
    XLF_REGISTER = 149,
    XLF_UNREGISTER = 201,
    RETURN_SUCCESS = 0,
    RETURN_FAILED = 32,
};

volatile LONG faults;
struct function functions[FUNCTIONS_MAX];
int function_count;
HMODULE xll;
unit module_name[300];
int texts_out;
DWORD main_thread;
volatile LONG calling;
struct arena kept;

static int ascii(const struct value *text, char *out, size_t size)
{
    if (text->xltype != TYPE_STR || text->val.str[0] >= size)
        return 0;
    for (int i = 0; i < text->val.str[0]; ++i)
        out[i] = (char)text->val.str[i + 1];
    out[text->val.str[0]] = 0;
    return 1;
}

struct function *find(const char *name)
{
    for (int i = 0; i < function_count; ++i)
        if (strcmp(functions[i].name, name) == 0)
            return &functions[i];
    return NULL;
}

static int register_function(int count, struct value **arguments, struct value *result)
{
    char symbol[80], types[80];
    struct function *f = &functions[function_count];
    if (function_count == FUNCTIONS_MAX || count < 4 || count > FIELDS_MAX) {
        FAULT("a registration with %d values", count);
        return RETURN_FAILED;
    }
    memset(f, 0, sizeof *f);
    for (int i = 0; i < count; ++i) {
        f->fields[i] = *arguments[i];
        if (arguments[i]->xltype == TYPE_STR) {
            size_t bytes = (1 + (size_t)arguments[i]->val.str[0]) * sizeof(unit);
            f->fields[i].val.str = take(&kept, bytes);
            memcpy(f->fields[i].val.str, arguments[i]->val.str, bytes);
            if (arguments[i]->val.str[0] > 255)
                FAULT("value %d of a registration has %d units", i, arguments[i]->val.str[0]);
        }
    }
    f->count = count;
    if (!ascii(&f->fields[1], symbol, sizeof symbol) || !ascii(&f->fields[2], types, sizeof types) ||
        !ascii(&f->fields[3], f->name, sizeof f->name)) {
        FAULT("a registration without a procedure, its types and a name");
        return RETURN_FAILED;
    }
    /* A value for the result, one for each argument, and the promise that any thread may call. */
    size_t values = strspn(types, "Q");
    if (values < 1 || values > 1 + 12 || strcmp(types + values, "$") != 0)
        FAULT("%s: types %s", f->name, types);
    f->arguments = (int)values - 1;
    f->procedure = (void *)GetProcAddress(xll, symbol);
    if (f->procedure == NULL)
        FAULT("%s: %s is not exported", f->name, symbol);
    if (find(f->name) != NULL)
        FAULT("%s is registered twice", f->name);
    f->named = f->alive = 1;
    ++function_count;
    result->xltype = TYPE_NUM;
    result->val.num = 1000.0 + function_count;
    return RETURN_SUCCESS;
}

__declspec(dllexport) int WINAPI MdCallBack12(int number, int count, struct value **arguments, struct value *result)
{
    char name[80];
    if (GetCurrentThreadId() != main_thread || calling != 0) {
        FAULT("the host's function %d was called from within a worksheet function", number);
        return RETURN_FAILED;
    }
    switch (number) {
    case XL_GET_NAME:
        result->xltype = TYPE_STR;
        result->val.str = malloc(sizeof module_name);
        memcpy(result->val.str, module_name, sizeof module_name);
        ++texts_out;
        return RETURN_SUCCESS;
    case XL_FREE:
        for (int i = 0; i < count; ++i)
            if (arguments[i]->xltype == TYPE_STR) {
                free(arguments[i]->val.str);
                --texts_out;
            }
        return RETURN_SUCCESS;
    case XLF_REGISTER:
        return register_function(count, arguments, result);
    case XLF_SET_NAME:
        if (count != 1 || !ascii(arguments[0], name, sizeof name) || find(name) == NULL || !find(name)->named) {
            FAULT("a name to delete that is not set");
            return RETURN_FAILED;
        }
        find(name)->named = 0;
        break;
    case XLF_UNREGISTER: {
        int i = count == 1 && arguments[0]->xltype == TYPE_NUM ? (int)arguments[0]->val.num - 1001 : -1;
        if (i < 0 || i >= function_count || !functions[i].alive) {
            FAULT("a registration to take back that does not stand");
            return RETURN_FAILED;
        }
        functions[i].alive = 0;
        break;
    }
    default:
        FAULT("the host's function %d was called", number);
        return RETURN_FAILED;
    }
    result->xltype = TYPE_BOOL;
    result->val.xbool = 1;
    return RETURN_SUCCESS;
}
