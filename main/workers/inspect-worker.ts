import { inspectTask, type InspectCalls } from './inspect-task';
import { serve } from './serve';

serve<InspectCalls>(inspectTask());
