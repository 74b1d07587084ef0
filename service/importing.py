"""Imports that wait till they are needed, in a process of several threads.

The libraries for drawings import each other in circles. Python lets a second thread see a module of such a circle half
made rather than have two threads wait for each other, and the import fails. So one thread imports at a time.
"""

import threading

ONE_AT_A_TIME = threading.RLock()  # held while a part of the computation is imported
