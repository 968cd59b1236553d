import { readTask, type ReadCalls } from './read-task';
import { serve } from './serve';

serve<ReadCalls>(readTask());
