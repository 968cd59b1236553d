import { matrixTask, type MatrixCalls } from './matrix-task';
import { serve } from './serve';

serve<MatrixCalls>(matrixTask());
