import PDFDocument from 'pdfkit';
import type { FontRun } from './fonts.ts';
import type { Inkwell } from './pen.ts';

/** The members of pdfkit's embedded font that its type package leaves out. */
interface EmbeddedFont {
  readonly id: string;
  encode(text: string): [hexGlyphs: string[], positions: unknown];
  ref(): PDFKit.PDFKitReference;
}

interface PdfkitInside {
  readonly _font: EmbeddedFont;
  readonly page: { readonly fonts: Record<string, PDFKit.PDFKitReference> };
  addContent(operators: string): unknown;
}

/**
 * One PDF file being written: pdfkit keeps its objects and embeds the fonts, the pages' operators
 * are ours. The title is the same for every card, so the file's own data names nobody.
 */
export class Book implements Inkwell {
  readonly document: PDFKit.PDFDocument;
  readonly #inside: PdfkitInside;
  readonly #fonts = new Map<string, EmbeddedFont>();
  readonly #encoded = new Map<string, { id: string; hex: string }>();

  /** @param language BCP 47 tag of the whole file. */
  constructor(language: string) {
    const options = {
      autoFirstPage: false,
      // Without this pdfkit loads the metrics of a standard font that no card uses.
      font: null as unknown as string,
      lang: language,
      pdfVersion: '1.7' as const,
      info: { Title: 'Join card', Creator: 'Quayword', Producer: 'Quayword' },
      displayTitle: true,
    };
    this.document = new PDFDocument(options);
    this.#inside = this.document as unknown as PdfkitInside;
  }

  encode(fontKey: string, run: FontRun): { id: string; hex: string } {
    const key = `${fontKey} ${run.text}`;
    const known = this.#encoded.get(key);
    if (known !== undefined) return known;
    const font = this.#fonts.get(fontKey) ?? this.#embed(run);
    const made = { id: font.id, hex: font.encode(run.text)[0].join('') };
    this.#encoded.set(key, made);
    return made;
  }

  #embed(run: FontRun): EmbeddedFont {
    // pdfkit also takes a font that fontkit has already read, which its types do not say.
    this.document.font(run.font.font as unknown as Buffer, run.font.key);
    const font = this.#inside._font;
    this.#fonts.set(run.font.key, font);
    return font;
  }

  /** @param size width and height in points. */
  addPage(size: readonly [number, number], operators: string): void {
    this.document.addPage({ size: [...size], margin: 0 });
    this.#inside.addContent(operators);
    for (const font of this.#fonts.values()) this.#inside.page.fonts[font.id] = font.ref();
  }
}
