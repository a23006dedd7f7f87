/** Text whose superscript characters (10⁻³) and indices (I_c0) are set as such in the page's own face. */
export default defineComponent({
  name: 'PText',
  props: { text: { type: String, required: true } },
  setup: props => () => typesetPieces(props.text).map(piece => piece.kind === 'text' ? piece.text : h(piece.kind, piece.text)),
})
