/**
 * 256 plain English words, one a byte value: 4 to 7 letters, no two alike in their first four letters or but one letter
 * apart. The order is fixed for ever: a seal printed today must read the same in ten years.
 */
export const SEAL_WORDS: readonly string[] = (
  "acorn alder amber anchor anvil apple apron arrow aspen autumn badger bamboo banjo barley basket beacon beaver " +
  "bench birch bison blanket blossom bonfire bottle bramble breeze bridge bronze bucket buffalo butter cabin cactus " +
  "camel candle canoe carrot castle cedar cherry chimney cider circle citrus clover cobalt coffee comet compass " +
  "copper coral cotton cradle cricket crystal curtain cushion daisy dancer denim desert diamond dolphin donkey " +
  "dragon drum eagle easel echo elbow emerald engine falcon feather fennel ferry fiddle finch flannel flint flute " +
  "forest fossil frost furrow galaxy garden garlic gecko geyser ginger giraffe glacier globe goblet granite grape " +
  "guitar hammock harvest hazel helmet heron hickory honey horizon hornet igloo indigo island ivory jacket jaguar " +
  "jasmine jigsaw jungle juniper kayak kettle kitchen kiwi ladder lagoon lantern larch laurel lemon lentil lilac " +
  "linen lizard lobster lotus lumber lupin magnet mango mantle maple marble market meadow meteor mirror mitten " +
  "monsoon moss motor mustard napkin nectar needle nickel nomad north nugget nutmeg oasis oatmeal ocean olive onion " +
  "orange orbit orchid osprey otter oyster palace panda papaya pasture pebble pelican pencil pepper pewter piano " +
  "pigeon pillow planet plaster plum pollen poppy prairie prism pumpkin quartz quilt quiver rabbit radish rafter " +
  "raisin raven ribbon ripple river robin rocket rooster rudder russet saddle saffron salmon sandal satin scarlet " +
  "scooter seagull shadow shell shovel silver sketch slate sparrow spider spinach spruce stable statue storm summit " +
  "sunset swallow tablet talon teapot temple thimble thistle thunder tiger timber tomato torch trellis trumpet " +
  "tulip tundra turnip turtle tuxedo umpire unicorn valley vanilla velvet violet viper volcano voyage waffle"
).split(" ");
