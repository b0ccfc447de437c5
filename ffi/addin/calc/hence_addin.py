"""The component that LibreOffice Calc loads: the worksheet functions and what the function wizard says of them.

Names, arguments and help come from hence_functions.py, which is made from hence's own table; the numbers come from the
library through hence_library.py.
"""

import uno
import unohelper
from com.sun.star.lang import Locale, XServiceInfo, XServiceName
from com.sun.star.sheet import XAddIn

import hence_functions
import hence_library

# The part before the dot of every function name, and the name under which Calc finds the functions.
SERVICE = hence_functions.SERVICE
IMPLEMENTATION = hence_functions.IMPLEMENTATION

# A mismatch ends the loading here, and with it an installation, with words that say what to do.
LIBRARY = hence_library.Library()


def functions_interface():
    """The interface that declares the functions, as the bases of a class.

    Calc finds it whenever it runs the functions. While an installation for all users is under way it is not known yet;
    then only the component's name is asked for.
    """
    try:
        return (uno.getClass(hence_functions.INTERFACE),)
    except Exception:
        return ()


class AddIn(unohelper.Base, XAddIn, XServiceName, XServiceInfo, *functions_interface()):
    """One method for each worksheet function (added below), and the information that Calc asks for."""

    def __init__(self, context, *arguments):
        self.locale = Locale("en", "", "")

    # XServiceName, XServiceInfo

    def getServiceName(self):
        return SERVICE

    def getImplementationName(self):
        return IMPLEMENTATION

    def getSupportedServiceNames(self):
        return (SERVICE, "com.sun.star.sheet.AddIn")

    def supportsService(self, name):
        return name in self.getSupportedServiceNames()

    # XLocalizable: the names are the same in every language.

    def setLocale(self, locale):
        self.locale = locale

    def getLocale(self):
        return self.locale

    # XAddIn: `name` is that of the method.

    def getProgrammaticFuntionName(self, display_name):
        return display_name.partition(".")[2].lower()

    def getDisplayFunctionName(self, name):
        return SERVICE + "." + name.upper()

    def getFunctionDescription(self, name):
        return hence_functions.FUNCTIONS[name][0]

    def getDisplayArgumentName(self, name, index):
        return argument(name, index)[0]

    def getArgumentDescription(self, name, index):
        return argument(name, index)[1]

    def getProgrammaticCategoryName(self, name):
        # Calc knows no categories but its own.
        return "Add-In"

    def getDisplayCategoryName(self, name):
        return hence_functions.CATEGORY


def argument(name, index):
    """Name and help of an argument; empty where there is none."""
    arguments = hence_functions.FUNCTIONS[name][1]
    return arguments[index] if 0 <= index < len(arguments) else ("", "")


def method(name):
    """The method of a function."""

    def call(self, *arguments):
        return LIBRARY.call(name, arguments)

    call.__name__ = name
    return call


for function in hence_functions.FUNCTIONS:
    setattr(AddIn, function, method(function))

g_ImplementationHelper = unohelper.ImplementationHelper()
g_ImplementationHelper.addImplementation(AddIn, IMPLEMENTATION, (SERVICE, "com.sun.star.sheet.AddIn"))
