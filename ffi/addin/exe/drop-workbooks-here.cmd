@echo off
rem Workbooks dropped on this file are filled and audited by the hence.exe beside it; the window stays to be read.
"%~dp0hence.exe" %*
pause
