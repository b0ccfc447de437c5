/* The stand-in host's own side: the entry that an add-in calls, and what it was told through it. */

#ifndef ENTRY_H
#define ENTRY_H

#include "values.h"

#include <stdio.h>
#include <windows.h>

enum { FUNCTIONS_MAX = 64, FIELDS_MAX = 32 };

/* What went wrong so far, and how to say more; only the first are printed. */
extern volatile LONG faults;

#define FAULT(...)                                                                                                     \
    do {                                                                                                               \
        if (InterlockedIncrement(&faults) <= 20) {                                                                     \
            printf("fault: " __VA_ARGS__);                                                                             \
            printf("\n");                                                                                              \
        }                                                                                                              \
    } while (0)

/* A function as registered. */
struct function {
    char name[80];    /* as formulas write it */
    struct value fields[FIELDS_MAX];
    int count;        /* how many fields, the module's name first */
    int arguments;    /* of the procedure, by the type text */
    void *procedure;
    int named, alive; /* the name and the registration stand */
};

extern struct function functions[FUNCTIONS_MAX];
extern int function_count;

extern HMODULE xll;
extern unit module_name[300];
extern int texts_out;         /* texts of the host's that the add-in has not given back */
extern DWORD main_thread;
extern volatile LONG calling; /* calls of worksheet functions under way */
extern struct arena kept;     /* for what must outlive a call */

/* The function of that name, or NULL. */
struct function *find(const char *name);

#endif
