import * as z from 'zod';

// A document or a call is checked once: code made for its schema would cost more than it saves. And the page's content
// policy forbids making code from text. It must be told before any schema is made, hence this module.
z.config({ jitless: true });

export { z };
