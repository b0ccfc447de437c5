/* Between R and hence: takes R's vectors by pointer, so that nothing is copied, and returns R vectors.
 *
 * A refusal comes back as a list of class "hence_refusal", which hence.R turns into a condition: an R error raised
 * from here would jump over C code. */
#include <R.h>
#include <Rinternals.h>
#include <R_ext/Rdynload.h>

#include <hence.h>

static SEXP refusal(const hence_error *error) {
    const char *names[] = {"status", "message", "argument", "index", ""};
    SEXP list = PROTECT(Rf_mkNamed(VECSXP, names));
    SET_VECTOR_ELT(list, 0, Rf_mkString(hence_status_name(error->code)));
    SET_VECTOR_ELT(list, 1, Rf_ScalarString(Rf_mkCharCE(error->message, CE_UTF8)));
    SET_VECTOR_ELT(list, 2, Rf_ScalarInteger(error->argument));
    SET_VECTOR_ELT(list, 3, Rf_ScalarReal((double)error->index)); /* R has no 64-bit integers */
    Rf_setAttrib(list, R_ClassSymbol, Rf_mkString("hence_refusal"));
    UNPROTECT(1);
    return list;
}

static const hence_basis *handle(SEXP basis) { return R_ExternalPtrAddr(basis); }

static void release(SEXP basis) {
    hence_basis_free(R_ExternalPtrAddr(basis));
    R_ClearExternalPtr(basis);
}

static SEXP same_version(void) { return Rf_ScalarLogical(hence_abi_version() == HENCE_ABI_VERSION); }

static SEXP basis_parse(SEXP line) {
    hence_error error = {.struct_size = sizeof error};
    hence_basis *basis = NULL;
    if (hence_basis_parse(Rf_translateCharUTF8(STRING_ELT(line, 0)), &basis, &error) != HENCE_OK)
        return refusal(&error);
    SEXP out = PROTECT(R_MakeExternalPtr(basis, R_NilValue, R_NilValue));
    R_RegisterCFinalizerEx(out, release, TRUE); /* freed by R's garbage collector */
    UNPROTECT(1);
    return out;
}

/* Asked with no room at all, the library says how many bytes a text needs. */
static SEXP text_of(int32_t (*text)(const hence_basis *, char *, size_t, hence_error *), SEXP basis) {
    hence_error error = {.struct_size = sizeof error};
    if (text(handle(basis), NULL, 0, &error) != HENCE_ERR_CAPACITY) return refusal(&error);
    size_t size = (size_t)error.index;
    char *buffer = R_alloc(size, 1);
    if (text(handle(basis), buffer, size, &error) != HENCE_OK) return refusal(&error);
    return Rf_ScalarString(Rf_mkCharCE(buffer, CE_UTF8));
}

static SEXP basis_line(SEXP basis) { return text_of(hence_basis_line, basis); }

static SEXP basis_words(SEXP basis) { return text_of(hence_basis_describe, basis); }

static SEXP each(int32_t (*function)(const hence_basis *, const double *, size_t, double *, hence_error *),
                 SEXP basis, SEXP offsets) {
    hence_error error = {.struct_size = sizeof error};
    SEXP out = PROTECT(Rf_allocVector(REALSXP, XLENGTH(offsets)));
    int32_t status = function(handle(basis), REAL(offsets), (size_t)XLENGTH(offsets), REAL(out), &error);
    UNPROTECT(1);
    return status == HENCE_OK ? out : refusal(&error);
}

static SEXP factors(SEXP basis, SEXP offsets) { return each(hence_factors, basis, offsets); }

static SEXP forward_rates(SEXP basis, SEXP offsets) { return each(hence_forward_rates, basis, offsets); }

static SEXP offsets_from_years(SEXP years, SEXP base, SEXP timing) {
    hence_error error = {.struct_size = sizeof error};
    SEXP out = PROTECT(Rf_allocVector(REALSXP, XLENGTH(years)));
    int32_t status = hence_offsets_from_years(REAL(years), (size_t)XLENGTH(years), Rf_asReal(base),
                                              Rf_translateCharUTF8(STRING_ELT(timing, 0)), REAL(out), &error);
    UNPROTECT(1);
    return status == HENCE_OK ? out : refusal(&error);
}

/* R keeps a matrix column after column: a stream a column there is the row-major, stream-a-row shape of C. */
static SEXP present_values(SEXP basis, SEXP offsets, SEXP flows) {
    hence_error error = {.struct_size = sizeof error};
    size_t n = (size_t)XLENGTH(offsets);
    size_t rows = n == 0 ? 0 : (size_t)XLENGTH(flows) / n;
    SEXP out = PROTECT(Rf_allocVector(REALSXP, (R_xlen_t)rows));
    int32_t status = hence_present_values(handle(basis), REAL(offsets), REAL(flows), rows, n, REAL(out), &error);
    UNPROTECT(1);
    return status == HENCE_OK ? out : refusal(&error);
}

/* By address, for C settles the arguments of a call in no order: the value must be read after the status is known. */
static SEXP number(int32_t status, const double *value, const hence_error *error) {
    return status == HENCE_OK ? Rf_ScalarReal(*value) : refusal(error);
}

static SEXP annual_equivalent(SEXP basis, SEXP value, SEXP service_years) {
    hence_error error = {.struct_size = sizeof error};
    double annual = 0;
    int32_t years = Rf_asInteger(service_years);
    return number(hence_annual_equivalent(handle(basis), Rf_asReal(value), years, &annual, &error), &annual, &error);
}

static SEXP irr_all(SEXP offsets, SEXP flows, SEXP lowest, SEXP highest) {
    hence_error error = {.struct_size = sizeof error};
    size_t n = (size_t)XLENGTH(flows), count = 0;
    double *rates = (double *)R_alloc(n, sizeof *rates); /* there cannot be more rates than flows */
    if (hence_irr_all(REAL(offsets), REAL(flows), n, Rf_asReal(lowest), Rf_asReal(highest), rates, n, &count,
                      &error) != HENCE_OK)
        return refusal(&error);
    SEXP out = Rf_allocVector(REALSXP, (R_xlen_t)count);
    for (size_t i = 0; i < count; i++) REAL(out)[i] = rates[i];
    return out;
}

static SEXP ramsey_rate(SEXP rho, SEXP eta, SEXP g) {
    hence_error error = {.struct_size = sizeof error};
    double rate = 0;
    return number(hence_ramsey_rate(Rf_asReal(rho), Rf_asReal(eta), Rf_asReal(g), &rate, &error), &rate, &error);
}

static SEXP equity_weight(SEXP income, SEXP reference, SEXP elasticity) {
    hence_error error = {.struct_size = sizeof error};
    double weight = 0;
    double y = Rf_asReal(income), median = Rf_asReal(reference), eta = Rf_asReal(elasticity);
    return number(hence_equity_weight(y, median, eta, &weight, &error), &weight, &error);
}

/* What R may call, with the number of arguments, which R then checks. */
void R_init_hence_shim(DllInfo *library) {
    static const R_CallMethodDef calls[] = {
        {"same_version", (DL_FUNC)same_version, 0},
        {"basis_parse", (DL_FUNC)basis_parse, 1},
        {"basis_line", (DL_FUNC)basis_line, 1},
        {"basis_words", (DL_FUNC)basis_words, 1},
        {"factors", (DL_FUNC)factors, 2},
        {"forward_rates", (DL_FUNC)forward_rates, 2},
        {"offsets_from_years", (DL_FUNC)offsets_from_years, 3},
        {"present_values", (DL_FUNC)present_values, 3},
        {"annual_equivalent", (DL_FUNC)annual_equivalent, 3},
        {"irr_all", (DL_FUNC)irr_all, 4},
        {"ramsey_rate", (DL_FUNC)ramsey_rate, 3},
        {"equity_weight", (DL_FUNC)equity_weight, 3},
        {NULL, NULL, 0},
    };
    R_registerRoutines(library, NULL, calls, NULL, NULL);
    R_useDynamicSymbols(library, FALSE);
}
