"""Every threshold of the service: name, value, and the reason for it. No other room holds one; a room, a file."""

from interwind_service.tolerances.batches import *
from interwind_service.tolerances.cautions import *
from interwind_service.tolerances.frequency import *
from interwind_service.tolerances.network import *
from interwind_service.tolerances.service import *
from interwind_service.tolerances.switching import *
from interwind_service.tolerances.time import *
from interwind_service.tolerances.windings import *
