/* A stand-in for Excel: loads an .xll, takes its registrations, calls its functions from one thread and from several,
 * compares every result bit for bit, hands it back, and looks for memory that was kept.
 *
 *     host XLL REGISTRATIONS CASES THREADS CALLS
 *
 * REGISTRATIONS holds a line for each function, with the values that must be registered behind the module's name. CASES
 * holds lines such as `HENCE.REAL n:3fb0000000000000 m = e:15`; one that begins with `once` is left out where calls are
 * repeated. Ends with 0 where all is well, 1 where the .xll is at fault, 2 where the stand-in was not used properly. */

#include "entry.h"
#include "hence.h"
#include "values.h"

#include <stdio.h>
#include <stdlib.h>
#include <string.h>
#include <windows.h>

enum { CASES_MAX = 1000, ARGUMENTS_MAX = 12 };

typedef struct value *(WINAPI *procedure0)(void);
typedef struct value *(WINAPI *procedure1)(struct value *);
typedef struct value *(WINAPI *procedure2)(struct value *, struct value *);
typedef struct value *(WINAPI *procedure3)(struct value *, struct value *, struct value *);
typedef struct value *(WINAPI *procedure4)(struct value *, struct value *, struct value *, struct value *);
typedef struct value *(WINAPI *procedure5)(struct value *, struct value *, struct value *, struct value *,
                                           struct value *);
typedef struct value *(WINAPI *procedure6)(struct value *, struct value *, struct value *, struct value *,
                                           struct value *, struct value *);
typedef struct value *(WINAPI *procedure7)(struct value *, struct value *, struct value *, struct value *,
                                           struct value *, struct value *, struct value *);
typedef struct value *(WINAPI *procedure8)(struct value *, struct value *, struct value *, struct value *,
                                           struct value *, struct value *, struct value *, struct value *);
typedef struct value *(WINAPI *procedure11)(struct value *, struct value *, struct value *, struct value *,
                                            struct value *, struct value *, struct value *, struct value *,
                                            struct value *, struct value *, struct value *);
typedef struct value *(WINAPI *procedure12)(struct value *, struct value *, struct value *, struct value *,
                                            struct value *, struct value *, struct value *, struct value *,
                                            struct value *, struct value *, struct value *, struct value *);

/* ---- cases ---- */

struct one_case {
    char *line;
    struct function *function;
    struct arena arguments;      /* everything the arguments hold, and a copy of it */
    char *copy;
    struct value *given[ARGUMENTS_MAX];
    struct value expected;
    int once;
};

static void (WINAPI *auto_free)(struct value *);
static int64_t (*live)(void);

/* Reads a case into memory of its own; what is not given is left out, as a host does. */
static void read_case(struct one_case *c, char *line)
{
    char name[80];
    int length;
    char *text = line;
    memset(c, 0, sizeof *c);
    c->line = line;
    if (strncmp(text, "once ", 5) == 0) {
        c->once = 1;
        text += 5;
    }
    if (sscanf(text, "%79s%n", name, &length) != 1 || (c->function = find(name)) == NULL) {
        FAULT("no such function is registered: %.60s", text);
        return;
    }
    text += length;
    /* The shortest values, two characters with the blank before them, take 32 bytes. */
    c->arguments.size = 4096 + 16 * strlen(line) + (strstr(line, "s*") != NULL ? 1 << 17 : 0);
    c->arguments.base = malloc(c->arguments.size);
    struct value *slots = take(&c->arguments, ARGUMENTS_MAX * sizeof(struct value));
    for (int i = 0; i < ARGUMENTS_MAX; ++i) {
        memset(&slots[i], 0, sizeof slots[i]);
        slots[i].xltype = TYPE_MISSING;
        c->given[i] = &slots[i];
    }
    for (int i = 0; strncmp(text, " = ", 3) != 0; ++i) {
        if (i == c->function->arguments || *text == 0) {
            printf("host: too many values, or no result: %.60s\n", line);
            exit(2);
        }
        slots[i] = read_value(&text, &c->arguments);
    }
    text += 3;
    c->copy = malloc(c->arguments.used);
    memcpy(c->copy, c->arguments.base, c->arguments.used);
    size_t used = c->arguments.used;
    c->expected = read_value(&text, &c->arguments);
    c->arguments.used = used;
    if (*text != 0) {
        printf("host: more than one result: %.60s\n", line);
        exit(2);
    }
}

static struct value *call(struct one_case *c)
{
    struct value **g = c->given;
    void *p = c->function->procedure;
    switch (c->function->arguments) {
    case 1: return ((procedure1)p)(g[0]);
    case 2: return ((procedure2)p)(g[0], g[1]);
    case 3: return ((procedure3)p)(g[0], g[1], g[2]);
    case 4: return ((procedure4)p)(g[0], g[1], g[2], g[3]);
    case 5: return ((procedure5)p)(g[0], g[1], g[2], g[3], g[4]);
    case 6: return ((procedure6)p)(g[0], g[1], g[2], g[3], g[4], g[5]);
    case 7: return ((procedure7)p)(g[0], g[1], g[2], g[3], g[4], g[5], g[6]);
    case 8: return ((procedure8)p)(g[0], g[1], g[2], g[3], g[4], g[5], g[6], g[7]);
    case 11: return ((procedure11)p)(g[0], g[1], g[2], g[3], g[4], g[5], g[6], g[7], g[8], g[9], g[10]);
    case 12: return ((procedure12)p)(g[0], g[1], g[2], g[3], g[4], g[5], g[6], g[7], g[8], g[9], g[10], g[11]);
    case 0: return ((procedure0)p)();
    default: return NULL;
    }
}

/* Calls once, compares, hands the result back. */
static void check(struct one_case *c)
{
    InterlockedIncrement(&calling);
    struct value *got = call(c);
    InterlockedDecrement(&calling);
    if (got == NULL) {
        FAULT("no result: %.120s", c->line);
        return;
    }
    if (!(got->xltype & BIT_DLL_FREE))
        FAULT("a result that nobody frees: %.120s", c->line);
    if (!same(got, &c->expected, BIT_DLL_FREE)) {
        FAULT("%.200s", c->line);
        if (faults <= 20) {
            printf("    expected ");
            show(&c->expected);
            printf("\n    got      ");
            show(got);
            printf("\n");
        }
    }
    if (memcmp(c->copy, c->arguments.base, c->arguments.used) != 0)
        FAULT("the arguments were changed: %.120s", c->line);
    if (got->xltype & BIT_DLL_FREE)
        auto_free(got);
}

/* ---- threads, memory, files ---- */

static char *cases_text;
static int case_count;

static struct one_case *read_cases(void)
{
    struct one_case *cases = calloc(CASES_MAX, sizeof *cases);
    case_count = 0;
    for (char *line = cases_text; *line != 0; line += strlen(line) + 1) {
        if (case_count == CASES_MAX) {
            printf("host: too many cases\n");
            exit(2);
        }
        read_case(&cases[case_count++], line);
    }
    return cases;
}

static DWORD WINAPI thread(void *cases)
{
    for (int round = 0; round < 20; ++round)
        for (int i = 0; i < case_count; ++i)
            if (!((struct one_case *)cases)[i].once)
                check(&((struct one_case *)cases)[i]);
    return 0;
}

/* The blocks in use on the process's heap, from which the add-in allocates too. */
static long blocks(void)
{
    PROCESS_HEAP_ENTRY entry;
    long count = 0;
    memset(&entry, 0, sizeof entry);
    HeapLock(GetProcessHeap());
    while (HeapWalk(GetProcessHeap(), &entry))
        count += (entry.wFlags & PROCESS_HEAP_ENTRY_BUSY) != 0;
    HeapUnlock(GetProcessHeap());
    return count;
}

/* A file's text, its lines ended by NUL and an empty line behind the last. */
static char *lines_of(const char *path)
{
    FILE *file = fopen(path, "rb");
    if (file == NULL) {
        printf("host: %s cannot be opened\n", path);
        exit(2);
    }
    fseek(file, 0, SEEK_END);
    size_t size = (size_t)ftell(file);
    rewind(file);
    char *text = calloc(size + 2, 1);
    if (fread(text, 1, size, file) != size)
        exit(2);
    fclose(file);
    for (size_t i = 0; i < size; ++i)
        if (text[i] == '\n')
            text[i] = 0;
    return text;
}

static void *symbol(const char *name)
{
    void *found = (void *)GetProcAddress(xll, name);
    if (found == NULL) {
        printf("fault: %s is not exported\n", name);
        exit(1);
    }
    return found;
}

/* ---- the parts of a session ---- */

static void compare_registrations(char *expected)
{
    int n = 0;
    for (char *line = expected; *line != 0; line += strlen(line) + 1, ++n) {
        char *text = line;
        int field = 0;
        struct function *f = &functions[n];
        if (n >= function_count) {
            FAULT("not registered: %.60s", line);
            continue;
        }
        if (f->fields[0].xltype != TYPE_STR ||
            memcmp(f->fields[0].val.str, module_name, (1 + (size_t)module_name[0]) * sizeof(unit)) != 0)
            FAULT("%s: not the module's own name", f->name);
        while (*text != 0) {
            struct value due = read_value(&text, &kept);
            if (++field >= f->count || !same(&f->fields[field], &due, 0)) {
                FAULT("%s: value %d of the registration is another", f->name, field);
                printf("    expected ");
                show(&due);
                printf("\n");
            }
        }
        if (field + 1 != f->count)
            FAULT("%s: %d values registered, %d expected", f->name, f->count, field + 1);
    }
    if (n != function_count)
        FAULT("%d functions registered, %d expected", function_count, n);
}

static void open_addin(char *registrations)
{
    int (WINAPI *open)(void) = (int (WINAPI *)(void))symbol("xlAutoOpen");
    if (open() != 1)
        FAULT("the add-in did not open");
    compare_registrations(registrations);
    if (texts_out != 0)
        FAULT("%d texts of the host's were not given back", texts_out);
}

static void close_addin(void)
{
    int (WINAPI *close)(void) = (int (WINAPI *)(void))symbol("xlAutoClose");
    if (close() != 1)
        FAULT("the add-in did not close");
    for (int i = 0; i < function_count; ++i)
        if (functions[i].named || functions[i].alive)
            FAULT("%s is left behind", functions[i].name);
}

static void compare_information(void)
{
    procedure1 information = (procedure1)symbol("xlAddInManagerInfo12");
    struct value one = {.val.w = 1, .xltype = TYPE_INT}, two = {.val.w = 2, .xltype = TYPE_INT};
    struct value one_as_number = {.val.num = 1.0, .xltype = TYPE_NUM};
    struct value *named = information(&one), *also = information(&one_as_number), *other = information(&two);
    if (named->xltype != TYPE_STR || named->val.str[0] < 5 || memcmp(named->val.str + 1, L"hence", 10) != 0)
        FAULT("the add-in's name is not given for 1");
    if (!same(also, named, 0))
        FAULT("the add-in's name is not given for 1.0");
    if (other->xltype != TYPE_ERR || other->val.err != 15)
        FAULT("2 is not answered with #VALUE!");
}

/* The C interface is there for macros, and in its own right. By hand: at 100% the factors are powers of a half. */
static void compare_interface(void)
{
    int32_t (*parse)(const char *, hence_basis **, hence_error *) = symbol("hence_basis_parse");
    int32_t (*factors)(const hence_basis *, const double *, size_t, double *, hence_error *) = symbol("hence_factors");
    void (*free_basis)(hence_basis *) = symbol("hence_basis_free");
    uint32_t (*version)(void) = symbol("hence_abi_version");
    hence_basis *basis = NULL;
    hence_error error = {.struct_size = sizeof error};
    const double offsets[3] = {0.0, 1.0, 2.0};
    double found[3] = {0.0, 0.0, 0.0};
    if (version() != HENCE_ABI_VERSION)
        FAULT("the version of the C interface is %u", version());
    if (parse("100%", &basis, &error) != HENCE_OK || factors(basis, offsets, 3, found, &error) != HENCE_OK)
        FAULT("the C interface: %s", error.message);
    if (found[0] != 1.0 || found[1] != 0.5 || found[2] != 0.25)
        FAULT("the C interface gives other factors");
    free_basis(basis);
    if (parse("3,5%", &basis, &error) != HENCE_ERR_SYNTAX || error.message[0] == 0)
        FAULT("the C interface takes a decimal comma");
}

int main(int count, char **words)
{
    if (count != 6)
        return 2;
    main_thread = GetCurrentThreadId();
    kept.size = 1 << 20;
    kept.base = malloc(kept.size);
    char *registrations = lines_of(words[2]);
    cases_text = lines_of(words[3]);
    int thread_count = atoi(words[4]), calls = atoi(words[5]);

    size_t length = strlen(words[1]);
    module_name[0] = (unit)length;
    for (size_t i = 0; i < length && i < 298; ++i)
        module_name[i + 1] = (unit)words[1][i];
    xll = LoadLibraryA(words[1]);
    if (xll == NULL) {
        printf("fault: the add-in cannot be loaded, error %lu\n", GetLastError());
        return 1;
    }
    auto_free = (void (WINAPI *)(struct value *))symbol("xlAutoFree12");
    live = (int64_t (*)(void))symbol("hence_xll_live");

    open_addin(registrations);
    compare_information();
    compare_interface();
    printf("registered %d\n", function_count);

    struct one_case *cases = read_cases();
    for (int i = 0; i < case_count; ++i)
        check(&cases[i]);
    printf("cases %d\n", case_count);

    /* A result counts as long as the host holds it; NULL and a value without the bit are left alone. */
    struct value *held = call(&cases[0]);
    struct value plain = {.val.num = 1.0, .xltype = TYPE_NUM};
    auto_free(NULL);
    auto_free(&plain);
    if (live() != 1)
        FAULT("one result is held, the add-in counts %lld", (long long)live());
    if (held != NULL)
        auto_free(held);

    HANDLE handles[64];
    for (int i = 0; i < thread_count; ++i)
        handles[i] = CreateThread(NULL, 0, thread, read_cases(), 0, NULL);
    for (int i = 0; i < thread_count; ++i)
        WaitForSingleObject(handles[i], INFINITE);
    printf("threads %d\n", thread_count);

    long before = 0;
    int made = 0;
    for (int i = 0; made < calls; ++i) {
        if (i == 2 * case_count)
            before = blocks();
        if (!cases[i % case_count].once) {
            check(&cases[i % case_count]);
            ++made;
        }
    }
    long after = blocks();
    if (before == 0)
        FAULT("the heap shows no blocks, or there were too few calls to compare");
    if (after > before + 100)
        FAULT("%ld blocks in use before the calls, %ld after", before, after);
    if (live() != 0)
        FAULT("%lld results are still counted", (long long)live());
    printf("calls %d, blocks %ld and %ld\n", made, before, after);

    close_addin();
    /* A user may take the add-in out and put it back. */
    function_count = 0;
    open_addin(registrations);
    close_addin();
    FreeLibrary(xll);
    printf("faults %ld\n", faults);
    return faults == 0 ? 0 : 1;
}
