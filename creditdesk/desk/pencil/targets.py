"""What can be marked, as the case tells it."""

from creditdesk.case.targets import Target as Target
from creditdesk.case.targets import TargetBook as TargetBook
from creditdesk.case.targets import TargetKind as TargetKind
