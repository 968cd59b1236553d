import { config } from 'zod';

// The page's content policy forbids building functions from text, which the schema library does unless told not to.
// It must be told before any schema is made: this module is imported first.
config({ jitless: true });
