/** The few members of fontkit that the cards use; the package carries no types of its own. */
declare module 'fontkit' {
  export interface Glyph {
    readonly id: number;
    /** In font units. */
    readonly advanceWidth: number;
  }
  export interface Font {
    readonly unitsPerEm: number;
    readonly postscriptName: string;
    hasGlyphForCodePoint(codePoint: number): boolean;
    glyphForCodePoint(codePoint: number): Glyph;
    layout(text: string): unknown;
  }
  export function create(bytes: Uint8Array): Font;
}
