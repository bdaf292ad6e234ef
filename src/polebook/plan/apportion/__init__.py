"""Values for a chain's free keys that reach its targets.

`apportion` is a generator of (done, total, best so far) whose value is a `Result`; `finished` runs one to its end.
"""

from polebook.plan.apportion.result import Best, Request, Result
from polebook.plan.apportion.run import apportion, concluded, finished

__all__ = ["Best", "Request", "Result", "apportion", "concluded", "finished"]
