/* Between Java and hence: lends Java's arrays to the library by pointer, and throws HenceException for a refusal.
 *
 * GetPrimitiveArrayCritical copies nothing on the usual virtual machines, but nothing else may be asked of Java until
 * the arrays are returned: so each function takes them, makes one call, returns them, and only then throws. */
#include <jni.h>

#include <hence.h>

#define JAVA(result, name) JNIEXPORT result JNICALL Java_Hence_##name

/* Texts cross as bytes, since what Java calls UTF-8 here is a form of its own. */
static jbyteArray bytes(JNIEnv *env, const char *text, jsize n) {
    jbyteArray array = (*env)->NewByteArray(env, n);
    if (array != NULL) (*env)->SetByteArrayRegion(env, array, 0, n, (const jbyte *)text);
    return array;
}

static void check(JNIEnv *env, int32_t status, const hence_error *error) {
    if (status == HENCE_OK) return;
    jsize n = 0;
    while (error->message[n] != '\0') n++;
    jclass class = (*env)->FindClass(env, "HenceException");
    if (class == NULL) return; /* Java has thrown an exception of its own, here and below */
    jmethodID make = (*env)->GetMethodID(env, class, "<init>", "(Ljava/lang/String;[BIJ)V");
    jstring name = (*env)->NewStringUTF(env, hence_status_name(status));
    jbyteArray message = bytes(env, error->message, n);
    if (make == NULL || name == NULL || message == NULL) return;
    jobject exception = (*env)->NewObject(env, class, make, name, message, (jint)error->argument, (jlong)error->index);
    if (exception != NULL) (*env)->Throw(env, exception);
}

static double *lend(JNIEnv *env, jdoubleArray array) { return (*env)->GetPrimitiveArrayCritical(env, array, NULL); }

static void back(JNIEnv *env, jdoubleArray array, double *numbers, jint mode) {
    if (numbers != NULL) (*env)->ReleasePrimitiveArrayCritical(env, array, numbers, mode);
}

enum { WRITTEN = 0, ONLY_READ = JNI_ABORT };

static const hence_basis *handle(jlong basis) { return (const hence_basis *)(intptr_t)basis; }

JAVA(jboolean, sameVersion)(JNIEnv *env, jclass self) {
    return hence_abi_version() == HENCE_ABI_VERSION;
}

JAVA(jlong, parse)(JNIEnv *env, jclass self, jbyteArray line) {
    hence_error error = {.struct_size = sizeof error};
    hence_basis *basis = NULL;
    jbyte *text = (*env)->GetByteArrayElements(env, line, NULL);
    if (text == NULL) return 0;
    int32_t status = hence_basis_parse((const char *)text, &basis, &error);
    (*env)->ReleaseByteArrayElements(env, line, text, JNI_ABORT);
    check(env, status, &error);
    return (jlong)(intptr_t)basis;
}

JAVA(void, free)(JNIEnv *env, jclass self, jlong basis) { hence_basis_free((hence_basis *)(intptr_t)basis); }

JAVA(jbyteArray, text)(JNIEnv *env, jclass self, jlong basis, jboolean words) {
    hence_error error = {.struct_size = sizeof error};
    char text[4096];
    int32_t status = words ? hence_basis_describe(handle(basis), text, sizeof text, &error)
                           : hence_basis_line(handle(basis), text, sizeof text, &error);
    check(env, status, &error);
    if (status != HENCE_OK) return NULL;
    jsize n = 0;
    while (text[n] != '\0') n++;
    return bytes(env, text, n);
}

JAVA(void, each)(JNIEnv *env, jclass self, jlong basis, jboolean rates, jdoubleArray offsets, jdoubleArray out) {
    hence_error error = {.struct_size = sizeof error};
    size_t n = (size_t)(*env)->GetArrayLength(env, offsets);
    double *t = lend(env, offsets), *x = lend(env, out);
    int32_t status = rates ? hence_forward_rates(handle(basis), t, n, x, &error)
                           : hence_factors(handle(basis), t, n, x, &error);
    back(env, out, x, WRITTEN);
    back(env, offsets, t, ONLY_READ);
    check(env, status, &error);
}

JAVA(void, offsets)(JNIEnv *env, jclass self, jdoubleArray years, jdouble base, jbyteArray timing, jdoubleArray out) {
    hence_error error = {.struct_size = sizeof error};
    size_t n = (size_t)(*env)->GetArrayLength(env, years);
    jbyte *text = (*env)->GetByteArrayElements(env, timing, NULL);
    if (text == NULL) return;
    double *y = lend(env, years), *t = lend(env, out);
    int32_t status = hence_offsets_from_years(y, n, base, (const char *)text, t, &error);
    back(env, out, t, WRITTEN);
    back(env, years, y, ONLY_READ);
    (*env)->ReleaseByteArrayElements(env, timing, text, JNI_ABORT);
    check(env, status, &error);
}

JAVA(void, values)(JNIEnv *env, jclass self, jlong basis, jdoubleArray offsets, jdoubleArray flows, jdoubleArray out) {
    hence_error error = {.struct_size = sizeof error};
    size_t n = (size_t)(*env)->GetArrayLength(env, offsets);
    size_t rows = (size_t)(*env)->GetArrayLength(env, out);
    double *t = lend(env, offsets), *f = lend(env, flows), *v = lend(env, out);
    int32_t status = hence_present_values(handle(basis), t, f, rows, n, v, &error);
    back(env, out, v, WRITTEN);
    back(env, flows, f, ONLY_READ);
    back(env, offsets, t, ONLY_READ);
    check(env, status, &error);
}

JAVA(jdouble, annual)(JNIEnv *env, jclass self, jlong basis, jdouble value, jint serviceYears) {
    hence_error error = {.struct_size = sizeof error};
    double annual = 0;
    check(env, hence_annual_equivalent(handle(basis), value, serviceYears, &annual, &error), &error);
    return annual;
}

JAVA(jint, rates)(JNIEnv *env, jclass self, jdoubleArray offsets, jdoubleArray flows, jdouble lowest, jdouble highest,
                  jdoubleArray out) {
    hence_error error = {.struct_size = sizeof error};
    size_t n = (size_t)(*env)->GetArrayLength(env, flows), capacity = (size_t)(*env)->GetArrayLength(env, out);
    size_t count = 0;
    double *t = lend(env, offsets), *f = lend(env, flows), *r = lend(env, out);
    int32_t status = hence_irr_all(t, f, n, lowest, highest, r, capacity, &count, &error);
    back(env, out, r, WRITTEN);
    back(env, flows, f, ONLY_READ);
    back(env, offsets, t, ONLY_READ);
    check(env, status, &error);
    return (jint)count;
}

JAVA(jdouble, ramseyRate)(JNIEnv *env, jclass self, jdouble rho, jdouble eta, jdouble g) {
    hence_error error = {.struct_size = sizeof error};
    double rate = 0;
    check(env, hence_ramsey_rate(rho, eta, g, &rate, &error), &error);
    return rate;
}

JAVA(jdouble, equityWeight)(JNIEnv *env, jclass self, jdouble income, jdouble reference, jdouble elasticity) {
    hence_error error = {.struct_size = sizeof error};
    double weight = 0;
    check(env, hence_equity_weight(income, reference, elasticity, &weight, &error), &error);
    return weight;
}
