/* For tests only: the one function of Windows' bcryptprimitives.dll that Rust's standard library asks for. Windows has
 * the library; some versions of Wine do not. */

#include <windows.h>

BOOLEAN NTAPI SystemFunction036(PVOID buffer, ULONG length);

__declspec(dllexport) BOOL WINAPI ProcessPrng(PBYTE buffer, SIZE_T length)
{
    return SystemFunction036(buffer, (ULONG)length);
}
