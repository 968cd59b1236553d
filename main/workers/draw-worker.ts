import { drawTask, type DrawCalls } from './draw-task';
import { serve } from './serve';

serve<DrawCalls>(drawTask());
