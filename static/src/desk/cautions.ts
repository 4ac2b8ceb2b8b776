// The cautions that the phone asks for, so that the desk can also name one that nobody confirmed.

export const usualCautions: readonly string[] = ['height', 'weather', 'rf'];
