"""Puts a module into a new document of LibreOffice and prints what its function Check gives: `basic.py MODULE`.

Prints nothing where the module does not compile."""

import os
import signal
import subprocess
import sys
import tempfile
import time

import uno
from com.sun.star.connection import NoConnectException


def option(name, value):
    return uno.createUnoStruct("com.sun.star.beans.PropertyValue", name, 0, value, 0)


def connected(pipe):
    """The context of the LibreOffice behind the pipe, once it listens."""
    local = uno.getComponentContext()
    resolver = local.ServiceManager.createInstanceWithContext("com.sun.star.bridge.UnoUrlResolver", local)
    for _ in range(300):
        try:
            return resolver.resolve(f"uno:pipe,name={pipe};urp;StarOffice.ComponentContext")
        except NoConnectException:
            time.sleep(0.2)
    raise SystemExit("LibreOffice does not answer")


with open(sys.argv[1], encoding="utf-8") as file:
    module = file.read()
pipe = f"hence{os.getpid()}"
with tempfile.TemporaryDirectory(ignore_cleanup_errors=True) as profile:
    office = subprocess.Popen(
        ["soffice", f"-env:UserInstallation=file://{profile}", "--headless", "--norestore",
         f"--accept=pipe,name={pipe};urp;"],
        start_new_session=True, stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL)
    try:
        context = connected(pipe)
        desktop = context.ServiceManager.createInstanceWithContext("com.sun.star.frame.Desktop", context)
        # 4: macros run without asking.
        options = (option("Hidden", True), option("MacroExecutionMode", 4))
        document = desktop.loadComponentFromURL("private:factory/scalc", "_blank", 0, options)
        libraries = document.BasicLibraries
        if not libraries.hasByName("Standard"):
            libraries.createLibrary("Standard")
        libraries.getByName("Standard").insertByName("Module", module)
        place = "vnd.sun.star.script:Standard.Module.Check?language=Basic&location=document"
        result, _, _ = document.getScriptProvider().getScript(place).invoke((), (), ())
        print(result or "", end="")
    finally:
        os.killpg(office.pid, signal.SIGKILL)
        office.wait()
